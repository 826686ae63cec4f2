/** Terms needed for full precision at |x| = 6, where 1 - erf is below double precision. */
const MAX_TERMS = 200;

/**
 * Error function: the all-positive series of Abramowitz & Stegun 1964, eq. 7.1.6, 2/√π e^(-x²) Σ 2^n
 * x^(2n+1)/(2n+1)!!. Error about 1e-15.
 */
export function erf(x: number): number {
  if (Math.abs(x) > 6) return Math.sign(x);
  let term = x;
  let sum = x;
  for (let n = 1; n < MAX_TERMS && Math.abs(term) > Math.abs(sum) * Number.EPSILON; n++) {
    term *= (2 * x * x) / (2 * n + 1);
    sum += term;
  }
  return (2 / Math.sqrt(Math.PI)) * Math.exp(-x * x) * sum;
}
