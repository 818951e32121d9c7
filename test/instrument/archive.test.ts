import { constants, deflateRawSync, gzipSync } from 'node:zlib';
import { zipSync } from 'fflate';
import { describe, expect, it } from 'vitest';
import { ARCHIVE_LIMITS, ArchiveRefused, unpackArchive } from '../../jobs/instrument/index.ts';
import type { Flag } from '../../schema/wire/flags.ts';
import { makeZip, zlibCrc32 } from './zip-file.ts';

const bytesOf = (text: string): Uint8Array => new TextEncoder().encode(text);
const textOf = (bytes: Uint8Array): string => new TextDecoder().decode(bytes);

function unpack(bytes: Uint8Array, path: string, limits = ARCHIVE_LIMITS) {
  const flags: Flag[] = [];
  const members = [...unpackArchive(bytes, path, limits, (flag) => flags.push(flag))];
  return { members: members.map((m) => [m.path, textOf(m.bytes)]), flags };
}

/** Raw deflate data of `megabytes` of zeros: one fully flushed block of a megabyte, over and over. */
function deflatedZeros(megabytes: number): Uint8Array {
  const block = deflateRawSync(new Uint8Array(1e6), { finishFlush: constants.Z_FULL_FLUSH });
  const end = deflateRawSync(new Uint8Array(0));
  const whole = new Uint8Array(block.length * megabytes + end.length);
  for (let i = 0; i < megabytes; i++) whole.set(block, i * block.length);
  whole.set(end, block.length * megabytes);
  return whole;
}

describe('zip', () => {
  it('yields members of nested folders under the archive path', () => {
    const zip = zipSync({
      S: { I: { 'a.txt': bytesOf('one'), 'b.txt': [bytesOf('two'), { level: 0 }] } },
      'c é.txt': bytesOf('3'),
    });
    expect(unpack(zip, 'run/all.zip')).toEqual({
      members: [
        ['run/all.zip/S/I/a.txt', 'one'],
        ['run/all.zip/S/I/b.txt', 'two'],
        ['run/all.zip/c é.txt', '3'],
      ],
      flags: [],
    });
  });

  it('takes directory entries and droppings of operating systems for nothing, the latter with a note', () => {
    const zip = zipSync({
      'S/': new Uint8Array(0),
      'S/a.txt': bytesOf('x'),
      '__MACOSX/S/._a.txt': bytesOf('y'),
      'S/.DS_Store': bytesOf('z'),
    });
    const { members, flags } = unpack(zip, 'a.zip');
    expect(members).toEqual([['a.zip/S/a.txt', 'x']]);
    expect(flags.map((f) => [f.severity, f.code])).toEqual([['note', 'archive-member-skipped']]);
    expect(flags[0].detail).toContain('«S/.DS_Store»');
  });

  it('unpacks a gzip member once and refuses archives inside it, with the reason', () => {
    const zip = zipSync({
      'a.txt.gz': gzipSync('inner'),
      'b.zip': zipSync({ 'c.txt': bytesOf('no') }),
      'd.txt.gz.gz': bytesOf('no'),
    });
    const { members, flags } = unpack(zip, 'a.zip');
    expect(members).toEqual([['a.zip/a.txt', 'inner']]);
    expect(flags.map((f) => f.detail)).toEqual([
      '«b.zip» in a.zip is an archive inside an archive',
      '«d.txt.gz.gz» in a.zip is an archive inside an archive',
    ]);
  });

  it.each([
    ['../up.txt', 'has a part «..»'],
    ['/root.txt', 'has an empty part'],
    ['a\\b.txt', 'holds a backslash'],
    ['=cmd.txt', 'starts with ='],
    ['a/\u0007.txt', 'holds a control character'],
  ])('leaves out a member with the unsafe path %j', (name, why) => {
    const { members, flags } = unpack(
      makeZip([
        { name, data: bytesOf('x') },
        { name: 'ok.txt', data: bytesOf('y') },
      ]),
      'a.zip',
    );
    expect(members).toEqual([['a.zip/ok.txt', 'y']]);
    expect(flags[0].detail).toContain(why);
    expect(flags[0].action).not.toBe('');
  });

  it('refuses encrypted members, odd methods, wrong checksums, wrong sizes and repeated names one by one', () => {
    const data = bytesOf('a line\n'.repeat(50));
    const zip = makeZip([
      { name: 'secret.txt', data, flags: 1 },
      { name: 'odd.txt', data, method: 12 },
      { name: 'sum.txt', data, crc: 1 },
      { name: 'more.txt', data, statedBytes: 10 },
      { name: 'fewer.txt', data, statedBytes: 400 },
      { name: 'good.txt', data },
      { name: 'good.txt', data },
    ]);
    const { members, flags } = unpack(zip, 'a.zip');
    expect(members.map((m) => m[0])).toEqual(['a.zip/good.txt']);
    expect(flags.map((f) => f.detail)).toEqual([
      '«secret.txt» in a.zip is encrypted',
      '«odd.txt» in a.zip is packed by method 12, which is not read',
      '«sum.txt» in a.zip cannot be unpacked: its checksum does not agree',
      '«more.txt» in a.zip cannot be unpacked: it holds more bytes than the 10 the archive states',
      '«fewer.txt» in a.zip cannot be unpacked: it holds fewer bytes than the 400 the archive states',
      '«good.txt» in a.zip stands in the archive twice; only the first was read',
    ]);
    expect(flags.every((f) => f.code === 'file-damaged' && f.action !== '')).toBe(true);
  });

  it('reads names of code page 437 and of decomposed form', () => {
    // Code page 437: 0x81 is ü, 0xE6 is µ (APPNOTE, appendix D).
    const old = makeZip([{ name: new Uint8Array([0x81, 0xe6, 0x2e, 0x74]), data: bytesOf('x') }]);
    expect(unpack(old, 'a.zip').members[0][0]).toBe('a.zip/üµ.t');
    expect(unpack(makeZip([{ name: 'u\u0308.t', data: bytesOf('x') }]), 'a.zip').members[0][0]).toBe('a.zip/ü.t');
  });

  it('refuses bytes that are no zip or a cut one', () => {
    const zip = zipSync({ 'a.txt': bytesOf('x'.repeat(1000)) });
    expect(() => unpack(bytesOf('no zip'), 'a.zip')).toThrow(/a\.zip cannot be unpacked: it has no directory/);
    expect(() => unpack(zip.subarray(0, zip.length - 30), 'a.zip')).toThrow(ArchiveRefused);
    expect(() => unpack(zip.subarray(50), 'a.zip')).toThrow(/copy is incomplete/);
  });
});

describe('limits hold before and while inflating', () => {
  const zeros = deflatedZeros(10_000);

  it('a zip of 10 GB of zeros that says so', () => {
    const zip = makeZip([{ name: 'z.txt', packed: zeros, statedBytes: 0xffffffff }]);
    expect(secondsUntilRefused(zip, 'z.zip')).toBeLessThan(1);
  });

  it('a zip of 10 GB of zeros that states few bytes', () => {
    const zip = makeZip([{ name: 'z.txt', packed: zeros, statedBytes: 1000 }]);
    expect(secondsUntilRefused(zip, 'z.zip')).toBeLessThan(1);
  });

  it('gzip of 10 GB of zeros', () => {
    const gzip = new Uint8Array(10 + zeros.length + 8);
    gzip.set([0x1f, 0x8b, 8]);
    gzip.set(zeros, 10);
    expect(secondsUntilRefused(gzip, 'z.txt.gz')).toBeLessThan(1);
  });

  it('the sum over members counts, whatever the ratio', () => {
    const part = { level: 0 } as const;
    const zip = zipSync({ a: [new Uint8Array(600), part], b: [new Uint8Array(600), part] });
    expect(() => unpack(zip, 'a.zip', { unpackedBytes: 1000, ratio: 200 })).toThrow(/more than 1000 bytes/);
    expect(unpack(zip, 'a.zip', { unpackedBytes: 1200, ratio: 200 }).members.length).toBe(2);
  });

  it('gzip inside zip counts too', () => {
    const zip = zipSync({ 'a.gz': [gzipSync(new Uint8Array(2_000_000)), { level: 0 }] });
    expect(() => unpack(zip, 'a.zip')).toThrow(/200-fold/);
  });

  function secondsUntilRefused(bytes: Uint8Array, path: string): number {
    // Time of the processor: other work on the machine must not fail this test.
    const start = process.cpuUsage();
    expect(() => unpack(bytes, path)).toThrow(ArchiveRefused);
    const { user, system } = process.cpuUsage(start);
    return (user + system) / 1e6;
  }
});

describe('gzip', () => {
  it('is the file without .gz; several members are one text', () => {
    expect(unpack(gzipSync('one\n'), 'S/I/a.txt.gz').members).toEqual([['S/I/a.txt', 'one\n']]);
    const two = new Uint8Array([...gzipSync('one\n'), ...gzipSync('two\n')]);
    expect(unpack(two, 'a.txt.gz').members).toEqual([['a.txt', 'one\ntwo\n']]);
  });

  it('refuses cut, changed and foreign bytes, and archives inside', () => {
    const packed = new Uint8Array(gzipSync('a line of text\n'.repeat(100)));
    expect(() => unpack(packed.subarray(0, packed.length - 9), 'a.gz')).toThrow(ArchiveRefused);
    const changed = packed.slice();
    changed[changed.length - 7] ^= 1;
    expect(() => unpack(changed, 'a.gz')).toThrow(/checksum/);
    expect(() => unpack(bytesOf('plain text, longer than a header'), 'a.gz')).toThrow(/not gzip/);
    expect(() => unpack(packed, 'a.tar.gz')).toThrow(/archive inside gzip/);
    expect(() => unpack(packed, 'a.zip.gz')).toThrow(/archive inside gzip/);
  });
});

it('the checksum agrees with zlib', () => {
  // A stored member is accepted only when its CRC-32 by zlib is found again.
  const data = Uint8Array.from({ length: 1000 }, (_, i) => (i * i) & 255);
  const zip = makeZip([{ name: 'a.bin', data, method: 0, crc: zlibCrc32(data) }]);
  expect(unpack(zip, 'a.zip').flags).toEqual([]);
});
