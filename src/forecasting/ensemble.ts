/** What an ensemble says: its members are draws that what comes is another one of. */

/**
 * Quantile by the (n + 1) p rule (Hyndman & Fan 1996, definition 6): of n exchangeable members and what comes, the k-th
 * smallest is expected at k / (n + 1), so intervals between such quantiles cover what they say. Held at the extremes.
 */
export function ensembleQuantile(members: ArrayLike<number>, p: number): number {
  const sorted = Float64Array.from(members).toSorted();
  const position = Math.min(sorted.length, Math.max(1, (sorted.length + 1) * p));
  const below = Math.floor(position);
  const low = sorted[below - 1];
  const high = sorted[Math.min(sorted.length, below + 1) - 1];
  return low + (high - low) * (position - below);
}
