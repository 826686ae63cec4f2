export interface RootOptions {
  /** Half width of the final bracket, in the unit of x. */
  readonly tolerance?: number;
  readonly maxIterations?: number;
}

/**
 * A zero of `f` between `low` and `high`, by Chandrupatla 1997, "A new hybrid quadratic/bisection algorithm
 * for finding the zero of a nonlinear function without using derivatives", Advances in Engineering Software
 * 28(3). null when the ends do not bracket a zero, when `f` gives NaN, or when the iterations run out.
 */
export function findRoot(
  f: (x: number) => number,
  low: number,
  high: number,
  { tolerance = 1e-9, maxIterations = 100 }: RootOptions = {},
): number | null {
  let a = high;
  let b = low;
  let fa = f(a);
  let fb = f(b);
  if (fa === 0) return a;
  if (fb === 0) return b;
  if (!(fa * fb < 0)) return null;
  let fraction = 0.5;
  for (let i = 0; i < maxIterations; i++) {
    const x = a + fraction * (b - a);
    const fx = f(x);
    if (!Number.isFinite(fx)) return null;
    if (fx === 0) return x;
    // [a, b] brackets the zero, c is the point dropped last.
    const sameSide = fx > 0 === fa > 0;
    const c = sameSide ? a : b;
    const fc = sameSide ? fa : fb;
    if (!sameSide) {
      b = a;
      fb = fa;
    }
    a = x;
    fa = fx;
    const best = Math.abs(fa) < Math.abs(fb) ? a : b;
    const relative = (tolerance + 2 * Number.EPSILON * Math.abs(best)) / Math.abs(b - a);
    if (relative > 0.5) return best;
    fraction = clampTo(quadraticFraction({ a, b, c, fa, fb, fc }), relative);
  }
  return null;
}

interface Bracket {
  readonly a: number;
  readonly b: number;
  readonly c: number;
  readonly fa: number;
  readonly fb: number;
  readonly fc: number;
}

/**
 * Where inverse quadratic interpolation is safe (Chandrupatla 1997, eq. 7) its fraction of the bracket, else
 * a half.
 */
function quadraticFraction({ a, b, c, fa, fb, fc }: Bracket): number {
  const xi = (a - b) / (c - b);
  const phi = (fa - fb) / (fc - fb);
  if (!(phi * phi < xi && (1 - phi) * (1 - phi) < 1 - xi)) return 0.5;
  return (fa / (fb - fa)) * (fc / (fb - fc)) + (((c - a) / (b - a)) * fa * fb) / ((fc - fa) * (fc - fb));
}

function clampTo(fraction: number, margin: number): number {
  return Math.min(1 - margin, Math.max(margin, fraction));
}
