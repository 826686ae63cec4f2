/** How much moisture the coil takes in truth, over what the bypass model says. */
import type { Coil } from './coil.ts';
import type { HourLine } from './hour-line.ts';

/** Hours that are looked at, and the least delivery that tells, W. */
const LOOK_HOURS = 14 * 24;
const TELLING_W = 150;
/** The model counts as this much cooling seen, W h. */
const PRIOR_WH = 2000;
const BOUNDS = [0.2, 4] as const;

export function latentScale(coil: Coil, lines: readonly HourLine[]): number {
  let seenWh = PRIOR_WH;
  let modelledWh = PRIOR_WH;
  for (const line of lines.slice(-LOOK_HOURS)) {
    if (line.latentW === null || line.roomC === null || line.roomW === null || line.sensibleW < TELLING_W)
      continue;
    const mostW = coil.sensibleMostW(line.roomC) + coil.fanW;
    seenWh += line.latentW;
    modelledWh += Math.min(1, line.sensibleW / Math.max(1, mostW)) * coil.latentMostW(line.roomC, line.roomW);
  }
  return Math.min(BOUNDS[1], Math.max(BOUNDS[0], seenWh / modelledWh));
}
