/**
 * Seeded random numbers: the only source of chance in the core. sfc32 (Doty-Humphrey, PractRand; public domain), 128 bits of
 * state filled from the seed text, so that equal seeds give equal draws on every machine.
 */
export interface Random {
  /** [0, 1), 32 bits */
  uniform(): number;
  /** standard normal */
  normal(): number;
  /** 0 … n−1 */
  integer(n: number): number;
}

/** @param seedHex any text; a SHA-256 as hex in the product */
export function createRandom(seedHex: string): Random {
  let [a, b, c] = [0x9e3779b9, 0x243f6a88, 0xb7e15162];
  let d = 1;
  const next = (): number => {
    const t = (((a + b) | 0) + d) | 0;
    d = (d + 1) | 0;
    a = b ^ (b >>> 9);
    b = (c + (c << 3)) | 0;
    c = ((c << 21) | (c >>> 11)) + t;
    return t >>> 0;
  };
  for (let i = 0; i < seedHex.length; i++) {
    a ^= Math.imul(seedHex.charCodeAt(i) + i, 0x85ebca6b);
    next();
  }
  for (let i = 0; i < 15; i++) next();

  let spare: number | undefined;
  return {
    uniform: () => next() / 4294967296,
    integer: (n) => Math.floor((next() / 4294967296) * n),
    normal() {
      if (spare !== undefined) {
        const value = spare;
        spare = undefined;
        return value;
      }
      // Polar method (Marsaglia & Bray 1964).
      for (;;) {
        const u = next() / 2147483648 - 1;
        const v = next() / 2147483648 - 1;
        const s = u * u + v * v;
        if (s === 0 || s >= 1) continue;
        const factor = Math.sqrt((-2 * Math.log(s)) / s);
        spare = v * factor;
        return u * factor;
      }
    },
  };
}
