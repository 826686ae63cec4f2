/** What the estimator takes and gives. */
import type { Command, Phase } from '../commands.ts';
import type { PointId, PointName, Reading } from '../points.ts';

export interface Learned {
  readonly name: string;
  readonly value: number;
  readonly sd: number;
  readonly unit: string;
}

export interface ProbeState {
  readonly point: PointName;
  /** What the probe reads too much at 0 °C, K; null while it has never stood in water under watch. */
  readonly errorAtIcePointK: number | null;
  readonly sd: number;
  /** When ice last checked it. */
  readonly atMs: number | null;
  /** Why it is not believed now; null when it is. */
  readonly setAside: string | null;
}

export interface IceEstimate {
  readonly atMs: number;
  readonly iceOnHandKwh: number;
  /** 5th and 95th percentile. */
  readonly lowKwh: number;
  readonly highKwh: number;
  readonly iceKg: number;
  readonly inventoryPct: number;
  readonly phase: Phase;
  readonly waterC: number;
  readonly heatLeakWPerK: number;
  readonly heatLeakSd: number;
  readonly chargingW: number;
  readonly dischargingW: number;
  readonly leakW: number;
  /** What the leaving probe was expected to read in the last step, before it was read; null without flow. */
  readonly predictedLeavingC: number | null;
  readonly learned: readonly Learned[];
  readonly probes: readonly ProbeState[];
  /** The missing instrument that would narrow the interval most; null when none would much. */
  readonly helpsMost: PointName | null;
  /** Running mean of normalised squared innovations by instrument; near 1 when model and readings agree. */
  readonly innovation: Readonly<Partial<Record<PointName, number>>>;
}

/** Plain data: what has to outlive a restart. */
export type EstimatorMemory = Readonly<Record<string, unknown>>;

export type Anchor = 'tank-refilled' | 'probe-moved' | 'empty' | 'full';

export interface EstimatorOptions {
  readonly seed: number;
  readonly startMs: number;
  readonly memory?: unknown;
  /** Length of one step; readings within it are folded together. */
  readonly stepMs?: number;
}

export interface Estimator {
  /** Takes the readings of (last, toMs], oldest first, and moves on in whole steps. */
  advance(toMs: number, readings: readonly Reading[], ordered: Command | null): void;
  estimate(): IceEstimate;
  memory(): EstimatorMemory;
  /** The owner says what happened; the estimate may jump. */
  anchor(what: Anchor, point?: PointId): void;
}
