import fc from 'fast-check';
import { expect, it } from 'vitest';
import { allTables, drain, newCampaign, openTestPorts, send } from './test-ports.ts';

/** A campaign with everything that could depend on who comes first: sheets that wait for files, a standard, a reference, peaks and questions, copies, a file without a row, a row without a file, equal base names. */
const FILES: readonly (readonly [path: string, text: string])[] = [
  [
    'scans.csv',
    'file,sample,instrument,mass [mg],segment,role,reference\na/1.txt,A,oven,1,,,\n2.txt,A,oven,1,,,\na/3.txt,A,stove,1,1,,\na/3.txt,A,stove,1,2,,\nb/1.txt,B,oven,2,,,blank.txt\n4.txt,B,chip,,,,\nbad.txt,B,oven,,,,\ngone.txt,B,oven,,,,\nin.txt,In,stove,5,,standard,\n',
  ],
  ['instruments.csv', 'instrument,kind,lag [s]\noven,furnace,2\n'],
  ['samples.csv', 'sample,melting temperature [K]\nA,900\n'],
  ['peaks.csv', 'sample,instrument,rate [K/s],peak [K]\nA,press,1,500\nP,press,1,510\n'],
  ['goal.csv', 'sample,conversion,temperature [K],time [s]\nA,0.01,400,3600\n'],
  ['programs/hold.csv', 'time [s],temperature [K]\n0,300\n100,400\n'],
  ['viscosity.csv', 'sample,temperature [K],log10 viscosity [Pa s]\nA,500,11\n'],
  ['in.txt', 'rate 1 melts late 1 lag 2'],
  ['blank.txt', 'rate 2 blank'],
  ['a/1.txt', 'rate 1'],
  ['b/1.txt', 'rate 2'],
  ['a/2.txt', 'rate 4'],
  ['a/3.txt', 'rate 8'],
  ['a/4.txt', 'rate 200'],
  ['a/bad.txt', 'bad'],
  ['copy/2.txt', 'rate 4'],
  ['copy/1.txt', 'rate 1'],
  ['unnamed.txt', 'rate 3'],
];

it('any order of arrival, with the runner at work in between, gives the same tables', { timeout: 60_000 }, async () => {
  const ports = await openTestPorts();
  try {
    const run = async (name: string, order: readonly (readonly [string, string])[], pauses: ReadonlySet<number>) => {
      const campaign = await newCampaign(ports, name);
      for (const [i, [path, text]] of order.entries()) {
        await send(ports, campaign, path, text);
        if (pauses.has(i)) await drain(ports, campaign);
      }
      await drain(ports, campaign);
      return allTables(ports, campaign);
    };
    const expected = await run('in order', FILES, new Set());
    expect(expected).toContain('same bytes as «a/1.txt»');
    let trial = 0;
    await fc.assert(
      fc.asyncProperty(
        fc.shuffledSubarray([...FILES], { minLength: FILES.length }),
        fc.uniqueArray(fc.integer({ min: 0, max: FILES.length - 1 }), { maxLength: 3 }),
        async (order, pauses) => {
          expect(await run(`trial ${++trial}`, order, new Set(pauses))).toBe(expected);
        },
      ),
      { numRuns: 12 },
    );
  } finally {
    await ports.close();
  }
});
