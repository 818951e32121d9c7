import { afterEach, beforeEach } from 'vitest';
import { newCampaign, openTestPorts, type TestPorts } from './test-ports.ts';

/** Gives every test of a file ports and a campaign of its own. */
export function forEachTest(use: (ports: TestPorts, campaign: string) => void): void {
  let ports: TestPorts;
  beforeEach(async () => {
    ports = await openTestPorts();
    use(ports, await newCampaign(ports));
  });
  afterEach(() => ports.close());
}
