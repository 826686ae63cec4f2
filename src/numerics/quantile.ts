function checkProbability(p: number): void {
  if (!(p >= 0 && p <= 1)) throw new RangeError(`Expected a probability from 0 to 1, found ${p}.`);
}

/**
 * Quantile of a sample by linear interpolation of order statistics: Hyndman & Fan 1996, "Sample quantiles in
 * statistical packages", The American Statistician 50(4), definition 7. The sample may come in any order and
 * is not changed. Throws `RangeError` when it is empty, holds NaN, or p is not a probability.
 */
export function quantile(values: ArrayLike<number>, p: number): number {
  checkProbability(p);
  const sorted = Float64Array.from(values).toSorted();
  // Typed arrays sort NaN to the end.
  if (sorted.length === 0 || Number.isNaN(sorted[sorted.length - 1])) {
    throw new RangeError('Expected a sample of at least one number without NaN.');
  }
  const at = (sorted.length - 1) * p;
  const below = Math.floor(at);
  const above = Math.min(below + 1, sorted.length - 1);
  return between(sorted[below], sorted[above], at - below);
}

/** Written so that two equal ends give that end exactly. */
function between(low: number, high: number, fraction: number): number {
  return low === high ? low : low + fraction * (high - low);
}

/**
 * Quantile of a weighted sample: each value stands at the middle of its own weight and the quantile is linear
 * between neighbours; with equal weights this is definition 5 of Hyndman & Fan 1996 (Hazen 1914). Values of
 * no weight count for nothing. Throws `RangeError` when no weight is above zero, on a negative weight, NaN,
 * or unequal lengths.
 */
export function weightedQuantile(values: ArrayLike<number>, weights: ArrayLike<number>, p: number): number {
  return weightedQuantiles(values, weights, [p])[0];
}

/** Several of them at the price of one sort, in the order of `ps`. */
export function weightedQuantiles(
  values: ArrayLike<number>,
  weights: ArrayLike<number>,
  ps: readonly number[],
): number[] {
  ps.forEach(checkProbability);
  if (values.length !== weights.length) throw new RangeError('Expected as many weights as values.');
  const order = Array.from({ length: values.length }, (_, i) => i).filter((i) => weights[i] !== 0);
  if (order.length === 0 || !order.every((i) => weights[i] > 0 && !Number.isNaN(values[i]))) {
    throw new RangeError(
      'Expected weights that are not negative, at least one above zero, and values without NaN.',
    );
  }
  order.sort((i, j) => values[i] - values[j]);
  const total = order.reduce((sum, i) => sum + weights[i], 0);
  return ps.map((p) => atWeight(values, weights, order, p * total));
}

/** The value at a sum of weights, along the sorted `order`. */
function atWeight(
  values: ArrayLike<number>,
  weights: ArrayLike<number>,
  order: readonly number[],
  target: number,
): number {
  let before = 0;
  let lastAt = Number.NEGATIVE_INFINITY;
  let last = values[order[0]];
  for (const i of order) {
    const at = before + weights[i] / 2;
    if (target <= at) {
      return lastAt === Number.NEGATIVE_INFINITY
        ? values[i]
        : between(last, values[i], (target - lastAt) / (at - lastAt));
    }
    before += weights[i];
    lastAt = at;
    last = values[i];
  }
  return last;
}
