/**
 * Ice that melts from the wall it froze on keeps a memory of partial cycles: water between wall and old ice, and what
 * has frozen anew on the wall within it. How freely it gives and takes heat depends on these and not on the inventory.
 *
 * Shells of one wall (a tube in internal melt, a container) are lumped into two: all within the old ice, and the rim
 * frozen anew on the wall. While a rim melts its own thin water is neglected; a second rim joins the old ice.
 */
import { X } from './layout.ts';

/** Rim below which the water behind it begins to be felt, as a fraction of a full bank: it never ends everywhere at once. */
const RIM_ENDS = 0.04;

/** Heat from the wall, as a fraction of a full bank's ice: melted when above zero, frozen when below. */
export function passWall(x: Float64Array, melted: number): void {
  if (!(x[X.ice] > 0)) {
    x[X.hollow] = 0;
    x[X.rim] = 0;
  } else if (melted > 0) {
    const ofRim = Math.min(Math.max(0, x[X.rim]), melted);
    x[X.rim] -= ofRim;
    x[X.hollow] += melted - ofRim;
  } else if (x[X.hollow] > 0) {
    x[X.rim] -= melted;
    if (x[X.rim] < x[X.hollow]) return;
    x[X.hollow] = 0;
    x[X.rim] = 0;
  }
}

/** Ice on a coil in a tub works loose within the hour after the machine has stopped, and floats up; no source. */
const LOOSE_S = 3600;

/** Ice on the coil of a tub: what this charge has made, not what floats above it. */
export function passLoose(x: Float64Array, made: number, dtS: number): void {
  x[X.rim] = made > 0 ? x[X.rim] + made : x[X.rim] * Math.exp(-dtS / LOOSE_S);
}

/** Water that stands between wall and ice as heat feels it when it melts, fraction of a full bank. */
export const meltedThrough = (x: Float64Array): number => throughRim(x, Math.max(0, x[X.hollow]));

/** What is felt of the water behind a rim that still melts. */
export const throughRim = (x: Float64Array, hollow: number): number =>
  Math.min(1, Math.max(0, 1 - x[X.rim] / RIM_ENDS)) * hollow;

/** Ice on the wall as coolant feels it when it freezes, fraction of a full bank. */
export function iceOnWall(x: Float64Array): number {
  const rim = Math.max(0, x[X.rim]);
  if (!(x[X.hollow] > 0)) return Math.max(0, x[X.ice]);
  return Math.min(rim, Math.max(0, x[X.ice]));
}
