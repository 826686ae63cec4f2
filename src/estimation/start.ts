/** Beliefs to start from, and what happens to them when the owner or a long silence says that all is open again. */
import { beliefFrom, type Belief } from './filter.ts';
import { LAYERS, LIE, STATES, X, type Priors } from './layout.ts';

/** Inventories that the first beliefs are centred on; the first of them is a bank without ice. */
const START_ICE = [0, 0.15, 0.4, 0.65, 0.9];
const START_SD = 0.12;

/** Beliefs from all-water to full, with the slow quantities of `slow` or of the priors. */
export function openBeliefs(priors: Priors, slow: Belief | null): Belief[] {
  return START_ICE.map((ice) => {
    const belief = slow
      ? { logWeight: 0, mean: Float64Array.from(slow.mean), cov: Float64Array.from(slow.cov) }
      : beliefFrom(priors.mean, priors.sd);
    restateIce(belief, ice, ice === 0 ? 0.02 : START_SD);
    for (const layer of LAYERS) restate(belief, layer, ice === 0 ? 8 : 0.3, ice === 0 ? 6 : 0.6);
    return belief;
  });
}

/** Logarithm of the weight that an idea gets which nobody has asked for. */
const IDEA = -5;
/** And of one that the end of the plateau speaks for. */
const SEEN = 5;
/** Inventories below and above which the other state of affairs is worth an idea. */
const NEARLY_EMPTY = 0.02;

/**
 * While water flows: what if the ice is gone that was believed in, or is there after all? One such idea at a time runs
 * along at little weight; readings raise it or let it go. A single Gaussian could not change its mind so far.
 */
export function withIdea(
  beliefs: readonly Belief[],
  best: Belief,
  leavingC: number,
  internal: boolean,
  plateauEnded: boolean,
): Belief[] {
  if (beliefs.length > 1 && !plateauEnded) return [...beliefs];
  const idea: Belief = {
    logWeight: best.logWeight + (plateauEnded ? SEEN : IDEA),
    mean: Float64Array.from(best.mean),
    cov: Float64Array.from(best.cov),
  };
  if (best.mean[X.ice] > NEARLY_EMPTY) {
    restateIce(idea, 0, 0.01);
    for (const layer of LAYERS) restate(idea, layer, Math.max(0, leavingC), 1.5);
    // Ice in a coil's reach may be gone while the water beyond is still cold.
    if (internal) restate(idea, X.top, 2.5, 2.5);
  } else {
    restateIce(idea, 0.15, 0.1);
    for (const layer of LAYERS) restate(idea, layer, Math.max(0, Math.min(leavingC, best.mean[layer])), 1.5);
  }
  return [...beliefs, idea];
}

/** Sets one quantity anew, unrelated to all others. */
export function restate(belief: Belief, i: number, mean: number, sd: number): void {
  belief.mean[i] = mean;
  for (let j = 0; j < STATES; j++) {
    belief.cov[i * STATES + j] = 0;
    belief.cov[j * STATES + i] = 0;
  }
  belief.cov[i * STATES + i] = sd * sd;
}

/** Sets the ice anew, and that it lies evenly. */
export function restateIce(belief: Belief, mean: number, sd: number): void {
  restate(belief, X.ice, mean, sd);
  for (const i of LIE) restate(belief, i, 0, 0);
}

/** Keeps means where physics allows them and parameters within reach of their priors. */
export function bound(belief: Belief, priors: Priors, leastIce: number): void {
  const { mean } = belief;
  mean[X.ice] = clamp(mean[X.ice], leastIce, 1.25);
  for (const layer of LAYERS) mean[layer] = clamp(mean[layer], -15, 45);
  for (let i = X.cop; i < STATES; i++) {
    mean[i] = clamp(mean[i], priors.mean[i] - 3.5 * priors.sd[i], priors.mean[i] + 3.5 * priors.sd[i]);
  }
}

const clamp = (value: number, low: number, high: number): number =>
  value > low ? Math.min(value, high) : low;
