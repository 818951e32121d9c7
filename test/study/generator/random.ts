/**
 * Seeded random numbers of the generator: xoshiro128** (Blackman & Vigna, ACM Trans. Math. Softw. 47 (2021) 36),
 * its state filled by splitmix32 from a hash of the seed text; normal deviates by Box & Muller 1958.
 */
export interface Random {
  /** In [0, 1), 53 bits. */
  uniform(): number;
  between(low: number, high: number): number;
  /** Evenly in the logarithm; both limits > 0. */
  betweenLog(low: number, high: number): number;
  /** 0 … count − 1 */
  integer(count: number): number;
  normal(): number;
  pick<T>(items: readonly T[]): T;
  /** A stream of its own, so that one more draw in one place moves nothing elsewhere. */
  fork(label: string): Random;
}

/** FNV-1a over the UTF-16 code units. */
function hashText(text: string): number {
  let hash = 0x811c9dc5;
  for (let i = 0; i < text.length; i++) hash = Math.imul(hash ^ text.charCodeAt(i), 0x01000193);
  return hash >>> 0;
}

function splitMix(seed: number): () => number {
  let state = seed >>> 0;
  return () => {
    state = (state + 0x9e3779b9) >>> 0;
    let z = Math.imul(state ^ (state >>> 16), 0x21f0aaad);
    z = Math.imul(z ^ (z >>> 15), 0x735a2d97);
    return (z ^ (z >>> 15)) >>> 0;
  };
}

const rotate = (x: number, k: number): number => ((x << k) | (x >>> (32 - k))) >>> 0;

export function seededRandom(seed: string): Random {
  const fill = splitMix(hashText(seed));
  let [a, b, c, d] = [fill(), fill(), fill(), fill() | 1];
  const next = (): number => {
    const result = Math.imul(rotate(Math.imul(b, 5) >>> 0, 7), 9) >>> 0;
    const t = (b << 9) >>> 0;
    c ^= a;
    d ^= b;
    b ^= c;
    a ^= d;
    c ^= t;
    d = rotate(d >>> 0, 11);
    return result;
  };
  let spare: number | undefined;
  const uniform = (): number => ((next() >>> 5) * 0x4000000 + (next() >>> 6)) / 0x20000000000000;
  const integer = (count: number): number => Math.floor(uniform() * count);
  return {
    uniform,
    integer,
    between: (low, high) => low + (high - low) * uniform(),
    betweenLog: (low, high) => low * (high / low) ** uniform(),
    normal() {
      if (spare !== undefined) {
        const value = spare;
        spare = undefined;
        return value;
      }
      const radius = Math.sqrt(-2 * Math.log(1 - uniform()));
      const angle = 2 * Math.PI * uniform();
      spare = radius * Math.sin(angle);
      return radius * Math.cos(angle);
    },
    pick: (items) => items[integer(items.length)],
    fork: (label) => seededRandom(`${seed}/${label}`),
  };
}
