/**
 * Exponential integrals E1(x) = ∫_x^∞ e^−u/u du and E2(x) = x ∫_x^∞ e^−u/u² du for x > 0, times e^x so that nothing underflows.
 * Series for x < 1 (Abramowitz & Stegun 1964, 5.1.11), Lentz's continued fraction above (5.1.22); about 1e−15 relative.
 */
const EULER = 0.5772156649015329;

/** e^x E_n(x), n = 1 or 2, x > 0. */
export function scaledExponentialIntegral(n: 1 | 2, x: number): number {
  if (!(x > 0)) throw new RangeError(`exponential integral needs x > 0; got ${x}`);
  if (x < 1) {
    let term = 1;
    let sum = 0;
    for (let k = 1; k < 40; k++) {
      term *= -x / k;
      sum -= term / k;
    }
    const e1 = -EULER - Math.log(x) + sum;
    return n === 1 ? e1 * Math.exp(x) : 1 - x * e1 * Math.exp(x);
  }
  // E_n(x) = e^−x (1/(x+n − 1·n/(x+n+2 − 2(n+1)/(x+n+4 − …))))
  const tiny = 1e-300;
  let b = x + n;
  let c = 1 / tiny;
  let d = 1 / b;
  let h = d;
  for (let i = 1; i < 200; i++) {
    const a = -i * (n - 1 + i);
    b += 2;
    d = 1 / (a * d + b);
    c = b + a / c;
    const delta = c * d;
    h *= delta;
    if (Math.abs(delta - 1) < 1e-16) break;
  }
  return h;
}
