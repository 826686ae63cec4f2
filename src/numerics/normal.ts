/** Normal distribution function: Abramowitz & Stegun 1964, 7.1.26, error below 1.5e-7; a tenth of the time of the series. */
export function normalCdf(z: number): number {
  const t = 1 / (1 + 0.3275911 * (Math.abs(z) / Math.SQRT2));
  const poly =
    t * (0.254829592 + t * (-0.284496736 + t * (1.421413741 + t * (-1.453152027 + t * 1.061405429))));
  const erf = 1 - poly * Math.exp((-z * z) / 2);
  return 0.5 * (1 + (z < 0 ? -erf : erf));
}

/** Normal deviate of a probability: Abramowitz & Stegun 1964, 26.2.23, absolute error below 4.5e-4. */
export function normalQuantile(p: number): number {
  const tail = Math.min(p, 1 - p);
  const t = Math.sqrt(-2 * Math.log(tail));
  const z =
    t - (2.515517 + t * (0.802853 + t * 0.010328)) / (1 + t * (1.432788 + t * (0.189269 + t * 0.001308)));
  return p < 0.5 ? -z : z;
}
