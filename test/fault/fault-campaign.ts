import type { Ports } from '../../jobs/ports/index.ts';
import { createCampaign, findCampaign, receiveFile } from '../../jobs/store/index.ts';
import { makeZip } from '../instrument/zip-file.ts';

const bytesOf = (text: string) => new TextEncoder().encode(text);

/** Every kind of file once: sheets, scans, an archive, a file that is refused, the same bytes twice, a path sent twice. */
export const FILES: readonly (readonly [string, Uint8Array])[] = [
  ['instruments.csv', bytesOf('instrument,kind,offset [K]\noven,furnace,0.5\n')],
  [
    'scans.csv',
    bytesOf(
      'file,sample,instrument\n1.txt,A,oven\n2.txt,A,oven\n3.txt,A,oven\nbad.txt,A,oven\nmore.zip/4.txt,B,oven\nmore.zip/5.txt,B,oven\n',
    ),
  ],
  ['goal.csv', bytesOf('sample,conversion,temperature [°C],time [s]\nA,0.5,300,60\n')],
  ['1.txt', bytesOf('rate 1')],
  ['2.txt', bytesOf('rate 2')],
  ['3.txt', bytesOf('rate 2.5')],
  ['3.txt', bytesOf('rate 3')],
  ['copy.txt', bytesOf('rate 1')],
  ['bad.txt', bytesOf('bad')],
  [
    'more.zip',
    makeZip([
      { name: '4.txt', data: bytesOf('rate 4') },
      { name: '5.txt', data: bytesOf('rate 5') },
    ]),
  ],
];

/** Makes the campaign where it is missing and sends everything, as a sender does who got no answer the first time. */
export async function takeInCampaign(ports: Ports): Promise<string> {
  const { id } = (await findCampaign(ports, 'trial')) ?? (await createCampaign(ports, 'trial'));
  for (const [path, bytes] of FILES) await receiveFile(ports, id, path, bytes);
  return id;
}
