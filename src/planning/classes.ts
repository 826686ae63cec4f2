/**
 * How hot it is turning out, as a small Markov state. At each slot the scenarios are ranked by what has been seen of
 * them until then, and cut into a few classes of like weight. A plan may tell classes apart but never the members of
 * one: it cannot act on what has not happened yet. Every scenario keeps its own path through the classes, so the
 * transition counts are those of the scenarios and a warm afternoon stays a warm evening.
 *
 * What has been seen is the load and the outdoor temperature over their means, in standard deviations, faded over six
 * hours: yesterday morning says less about tonight than this afternoon does.
 */
import { spanOf, type PlanProblem } from './problem.ts';

export interface Classes {
  /** Most classes in any slot. */
  readonly most: number;
  /** Class of a scenario at a slot: [slot × scenarios + scenario]; one more slot than there are, for the end. */
  readonly of: Uint8Array;
  /** Weight of a scenario within its class at a slot, summing to 1 over the class. */
  readonly share: Float64Array;
  /** Scenario weights, summing to 1. */
  readonly weight: Float64Array;
}

const FADE_HOURS = 6;

/** Scenarios that a class holds at the least, so that its mean means something. */
const MEMBERS = 4;

/** Differences in load and outdoor temperature below which nobody could tell two evenings apart. */
const LEAST_LOAD_W = 50;
const LEAST_OUTDOOR_K = 0.5;
/** Spread of what has been seen, in those units or standard deviations, from which there are classes at all. */
const TOLD_APART = 1;

export function classify(problem: PlanProblem, mostClasses: number): Classes {
  const { scenarios, slots } = problem;
  const count = scenarios.length;
  const most = Math.max(1, Math.min(mostClasses, Math.floor(count / MEMBERS)));
  const total = scenarios.reduce((sum, s) => sum + s.weight, 0);
  const weight = Float64Array.from(scenarios, (s) => s.weight / total);
  const of = new Uint8Array((slots + 1) * count);
  const share = new Float64Array((slots + 1) * count);
  const seen = new Float64Array(count);
  const fade = Math.exp(-problem.slotMs / 3_600_000 / FADE_HOURS);
  const order = Array.from({ length: count }, (_, s) => s);
  for (let t = 0; t <= slots; t += 1) {
    order.sort((a, b) => seen[a] - seen[b] || a - b);
    const apart = seen[order[count - 1]] - seen[order[0]] >= TOLD_APART;
    cut(order, weight, apart ? most : 1, of.subarray(t * count, (t + 1) * count));
    shareOut(of, share, weight, t, most);
    for (let k = 0; t < slots && k < spanOf(problem, t); k += 1) see(problem, weight, t, fade, seen);
  }
  return { most, of, share, weight };
}

/** Cuts an order of scenarios into classes of like weight. */
function cut(order: readonly number[], weight: Float64Array, classes: number, into: Uint8Array): void {
  let below = 0;
  for (const s of order) {
    into[s] = Math.min(classes - 1, Math.floor((below + weight[s] / 2) * classes));
    below += weight[s];
  }
}

function shareOut(of: Uint8Array, share: Float64Array, weight: Float64Array, t: number, most: number): void {
  const count = weight.length;
  const sums = new Float64Array(most);
  for (let s = 0; s < count; s += 1) sums[of[t * count + s]] += weight[s];
  for (let s = 0; s < count; s += 1) {
    const sum = sums[of[t * count + s]];
    share[t * count + s] = sum > 0 ? weight[s] / sum : 0;
  }
}

function see(problem: PlanProblem, weight: Float64Array, t: number, fade: number, seen: Float64Array): void {
  const load = standardised(weight, LEAST_LOAD_W, (s) => problem.scenarios[s].loadW[t]);
  const outdoor = standardised(weight, LEAST_OUTDOOR_K, (s) => problem.scenarios[s].outdoorC[t]);
  for (let s = 0; s < seen.length; s += 1) seen[s] = fade * seen[s] + load(s) + outdoor(s);
}

function standardised(
  weight: Float64Array,
  least: number,
  value: (s: number) => number,
): (s: number) => number {
  let mean = 0;
  let square = 0;
  for (let s = 0; s < weight.length; s += 1) {
    mean += weight[s] * value(s);
    square += weight[s] * value(s) ** 2;
  }
  const sd = Math.sqrt(Math.max(0, square - mean * mean));
  return (s) => (value(s) - mean) / Math.max(sd, least);
}
