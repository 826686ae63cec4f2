/**
 * The levels of the battery that a plan looks at. The floor is one of them: what may be taken changes there, and a
 * value that is linear across it would blur the change.
 */
import type { Island } from './electricity.ts';

export interface BatteryGrid {
  /** 1 where there is no battery. */
  readonly points: number;
  /** Steps from empty to the floor. */
  readonly below: number;
  readonly floorKwh: number;
  readonly stepBelowKwh: number;
  readonly stepAboveKwh: number;
}

export function batteryGrid(island: Island | null, wanted: number): BatteryGrid {
  if (!island || !(island.capacityKwh > 0))
    return { points: 1, below: 0, floorKwh: 0, stepBelowKwh: 1, stepAboveKwh: 1 };
  const { capacityKwh } = island;
  const floorKwh = Math.min(island.floorKwh, capacityKwh);
  const steps = Math.max(2, wanted - 1);
  const share = Math.round((steps * floorKwh) / capacityKwh);
  const below = floorKwh <= 0 ? 0 : floorKwh >= capacityKwh ? steps : Math.min(steps - 1, Math.max(1, share));
  const above = steps - below;
  return {
    points: steps + 1,
    below,
    floorKwh,
    stepBelowKwh: below > 0 ? floorKwh / below : 1,
    stepAboveKwh: above > 0 ? (capacityKwh - floorKwh) / above : 1,
  };
}

/** Charge at a level. */
export function levelKwh(grid: BatteryGrid, level: number): number {
  return level <= grid.below
    ? level * grid.stepBelowKwh
    : grid.floorKwh + (level - grid.below) * grid.stepAboveKwh;
}

/** Level of a charge, with its fraction: 0 to one less than the points. */
export function levelOf(grid: BatteryGrid, kwh: number): number {
  const level =
    kwh < grid.floorKwh ? kwh / grid.stepBelowKwh : grid.below + (kwh - grid.floorKwh) / grid.stepAboveKwh;
  return level < 0 ? 0 : level > grid.points - 1 ? grid.points - 1 : level;
}
