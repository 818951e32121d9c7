import { describe, expect, test } from 'vitest';
import { isLoopback, refuseForeignRequest, roleNeeded } from '../../api/access.ts';

const refusal = (headers: Record<string, string>, port: number) =>
  refuseForeignRequest(new Headers(headers), port)?.code;

// The rules are the project’s own; that a rebound name arrives in Host and a foreign page in Origin is RFC 9110 7.2 and RFC 6454 7.
describe('open access', () => {
  test.each(['localhost:8787', '127.0.0.1:8787', '[::1]:8787', 'LOCALHOST:8787'])('takes Host %s', (host) => {
    expect(refusal({ host }, 8787)).toBeUndefined();
  });
  test.each([
    'evil.example:8787',
    'localhost.evil.example:8787',
    'localhost:8788',
    'localhost',
    '127.0.0.2:8787',
    '192.168.1.5:8787',
    'localhost:8787:8787',
    'localhost:8787@evil.example',
    '',
  ])('refuses Host %j', (host) => {
    expect(refusal({ host }, 8787)).toBe('host-refused');
  });
  test('refuses a request without Host', () => {
    expect(refusal({}, 8787)).toBe('host-refused');
  });
  test('reads a missing port as 80', () => {
    expect(refusal({ host: 'localhost' }, 80)).toBeUndefined();
    expect(refusal({ host: 'localhost', origin: 'http://localhost' }, 80)).toBeUndefined();
  });
  test.each(['http://localhost:8787', 'http://127.0.0.1:8787', 'http://[::1]:8787'])('takes Origin %s', (origin) => {
    expect(refusal({ host: 'localhost:8787', origin }, 8787)).toBeUndefined();
  });
  test.each([
    'https://localhost:8787',
    'http://localhost:3000',
    'http://localhost',
    'https://evil.example',
    'null',
    '',
  ])('refuses Origin %j', (origin) => {
    expect(refusal({ host: 'localhost:8787', origin }, 8787)).toBe('origin-refused');
  });
  test.each(['forwarded', 'via', 'x-forwarded-for', 'X-Forwarded-Host', 'x-forwarded-anything'])(
    'refuses the header %s',
    (name) => {
      expect(refusal({ host: 'localhost:8787', [name]: 'x' }, 8787)).toBe('proxy-refused');
    },
  );
});

describe('addresses and roles', () => {
  test.each(['127.0.0.1', 'localhost', '::1', '[::1]'])('%s is loopback', (host) => {
    expect(isLoopback(host)).toBe(true);
  });
  test.each(['0.0.0.0', '::', '192.168.1.5', 'lab.example', '', '127.0.0.1.evil.example'])('%j is not', (host) => {
    expect(isLoopback(host)).toBe(false);
  });
  // The project’s own rule.
  test.each([
    ['GET', '/v1/campaigns', 'reader'],
    ['HEAD', '/v1/campaigns', 'reader'],
    ['POST', '/v1/samples/m_1/forecasts', 'reader'],
    ['POST', '/v1/campaigns', 'sender'],
    ['PUT', '/v1/campaigns/c/files', 'sender'],
    ['PATCH', '/v1/scans/s', 'sender'],
    ['POST', '/v1/jobs/j/retry', 'sender'],
    ['DELETE', '/v1/campaigns/c', 'keeper'],
    ['GET', '/metrics', 'keeper'],
    ['GET', '/v1', 'reader'],
    ['OPTIONS', '/v1/campaigns', 'keeper'],
    ['POST', '/v1/samples/forecasts', 'sender'],
    ['GET', '/v1/openapi.json', undefined],
    ['GET', '/v1/reference', undefined],
    ['GET', '/healthz', undefined],
    ['GET', '/campaigns/c', undefined],
  ] as const)('%s %s needs %s', (method, path, role) => {
    expect(roleNeeded(method, path)).toBe(role);
  });
});
