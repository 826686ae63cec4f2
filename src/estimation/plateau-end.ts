/**
 * The end of the plateau in an internal-melt bank: when the last ice round the coil is gone, the coil's conductance
 * falls by half within the hour, while melting alone lets it sink far more slowly.
 */
export interface PlateauWatch {
  /** Running means of the logarithm of what entering and leaving coolant show of the conductance, W/K. */
  fastLog: number | null;
  slowLog: number | null;
}

export const newPlateauWatch = (): PlateauWatch => ({ fastLog: null, slowLog: null });

const FAST_S = 300;
const SLOW_S = 2400;
/** Fall between the means that no melting makes: on the measured tank it stays below 0.22 through a whole discharge. */
const FALL = 0.27;
/** Nearer to each other or to 0 °C than this the probes' own errors rule, K. */
const LEAST_RISE_K = 0.4;
const LEAST_LEAVING_C = 1.5;

/** Watches a step under steady flow; true while the conductance is falling as only the end of the ice makes it. */
export function watchPlateau(
  watch: PlateauWatch,
  enteringC: number,
  leavingC: number,
  loopWPerK: number,
  dtS: number,
): boolean {
  if (!(leavingC > LEAST_LEAVING_C && enteringC - leavingC > LEAST_RISE_K)) return false;
  const seen = Math.log(loopWPerK * Math.log(enteringC / leavingC));
  watch.fastLog = follow(watch.fastLog, seen, dtS / FAST_S);
  watch.slowLog = follow(watch.slowLog, seen, dtS / SLOW_S);
  return watch.slowLog - watch.fastLog > FALL;
}

function follow(mean: number | null, value: number, share: number): number {
  return mean === null ? value : mean + Math.min(1, share) * (value - mean);
}
