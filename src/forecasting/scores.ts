/** How good a forecast was. Ensembles are equally likely members unless weights are given. */

/**
 * Continuous ranked probability score of an ensemble: E|X − y| − ½ E|X − X′| (Gneiting & Raftery 2007, "Strictly proper
 * scoring rules, prediction, and estimation", JASA 102, eq. 21). In the unit of the forecast; the absolute error for a
 * single member; smaller is better.
 */
export function crps(members: ArrayLike<number>, observed: number, weights?: ArrayLike<number>): number {
  const order = Array.from({ length: members.length }, (_, i) => i).toSorted(
    (i, j) => members[i] - members[j],
  );
  const total = order.reduce((sum, i) => sum + (weights?.[i] ?? 1), 0);
  let error = 0;
  let below = 0;
  let spread = 0;
  for (const i of order) {
    const weight = (weights?.[i] ?? 1) / total;
    error += weight * Math.abs(members[i] - observed);
    // ½ E|X − X′| = Σ w x (2 W − 1), W the weight up to the middle of this member
    spread += weight * members[i] * (2 * (below + weight / 2) - 1);
    below += weight;
  }
  return error - spread;
}

/** Pinball loss of a quantile forecast at probability p. */
export function pinball(forecast: number, observed: number, p: number): number {
  return observed >= forecast ? p * (observed - forecast) : (1 - p) * (forecast - observed);
}

/** Share of observations inside their closed intervals; null without any. */
export function coverage(
  low: ArrayLike<number>,
  high: ArrayLike<number>,
  observed: ArrayLike<number>,
): number | null {
  if (observed.length === 0) return null;
  let inside = 0;
  for (let i = 0; i < observed.length; i += 1) {
    if (observed[i] >= low[i] && observed[i] <= high[i]) inside += 1;
  }
  return inside / observed.length;
}

/**
 * CV(RMSE), %: root mean square error over the mean of the observations (ASHRAE Guideline 14-2014; `parameters` is p in
 * its n − p, 1 for calibrated simulation and 0 for a plain score). null where the mean is not above zero.
 */
export function cvRmsePct(
  forecast: ArrayLike<number>,
  observed: ArrayLike<number>,
  parameters = 0,
): number | null {
  const mean = meanOf(observed);
  const freedom = observed.length - parameters;
  if (!(mean > 0) || !(freedom > 0)) return null;
  let squares = 0;
  for (let i = 0; i < observed.length; i += 1) squares += (forecast[i] - observed[i]) ** 2;
  return (100 * Math.sqrt(squares / freedom)) / mean;
}

/**
 * NMBE, %: mean error over the mean of the observations (ASHRAE Guideline 14-2014). Here forecast − observed, so a
 * forecast that is too high has a positive bias; the guideline counts it the other way round.
 */
export function nmbePct(
  forecast: ArrayLike<number>,
  observed: ArrayLike<number>,
  parameters = 0,
): number | null {
  const mean = meanOf(observed);
  const freedom = observed.length - parameters;
  if (!(mean > 0) || !(freedom > 0)) return null;
  let errors = 0;
  for (let i = 0; i < observed.length; i += 1) errors += forecast[i] - observed[i];
  return (100 * errors) / freedom / mean;
}

function meanOf(values: ArrayLike<number>): number {
  let sum = 0;
  for (let i = 0; i < values.length; i += 1) sum += values[i];
  return sum / values.length;
}
