/** What dispatch is told, what it remembers and what limits it keeps. It knows neither plan nor plant. */
import type { Command } from '../commands.ts';
import type { LivePoints } from '../points.ts';
import type { ClockState } from '../record.ts';
import type { DisplayUnits } from '../units.ts';

/** What somebody asks for in this slot, and why, in one sentence. */
export interface Request {
  readonly command: Command;
  readonly reason: string;
  /** What the owner wished, one sentence, to be told beside whatever holds it back. */
  readonly wished?: string;
  readonly numbers: Readonly<Record<string, number | null>>;
}

/** What is known of the plant right now. */
export interface PlantView {
  readonly nowMs: number;
  /** Time that nobody sets; absent where the clock is never set. */
  readonly steadyMs?: number;
  readonly live: LivePoints;
  /** Estimated ice inventory; null before the first estimate. */
  readonly inventoryPct: number | null;
  readonly clock: ClockState;
  readonly brokerConnected: boolean;
}

/** What has to be remembered from one cycle to the next; plain data, so that it outlives a restart. */
export interface DispatchMemory {
  /** Whether the chiller is ordered on, and since when. What its power shows never changes this, but at the very start. */
  readonly chillerOn: boolean;
  readonly chillerSinceMs: number;
  /** When its power last showed it running; null before that. */
  readonly chillerSeenMs: number | null;
  /**
   * False until its power was first heard or an order was given: a chiller found running before that is taken over, not
   * cut off. After an order to stop, power that still shows is no reason to start it again.
   */
  readonly chillerKnown: boolean;
  /** Since when the pump is ordered on; null while off. */
  readonly pumpOnSinceMs: number | null;
  readonly overFrozen: boolean;
  readonly coilCold: boolean;
  readonly hotOutdoors: boolean;
  readonly batteryLow: boolean;
  /** Until when the pump rests after it ran dry. */
  readonly dryUntilMs: number | null;
  /** Until when the chiller rests after its high-pressure cut-out tripped. */
  readonly trippedUntilMs: number | null;
  /** Both clocks at the last cycle: what they disagree by is a step of the wall clock, and no time has passed in it. */
  readonly lastMs?: number | null;
  readonly lastSteadyMs?: number | null;
}

/** Limits from the site file, in the units of the points. */
export interface Limits {
  /** How sentences show temperatures. */
  readonly units: DisplayUnits;
  readonly minOnMs: number;
  readonly minOffMs: number;
  readonly chillerRunningAboveW: number;
  readonly chillerW: number;
  readonly startW: number;
  readonly mostOutdoorC: number;
  readonly coilFreezeC: number;
  readonly pumpRunningAboveW: number;
  readonly dryPumpW: number | null;
  readonly flowLPerMin: number;
  readonly fullCoolantC: number | null;
  readonly fullLevelMm: number | null;
  /** True when the thickness electrode sits where the bank is full. */
  readonly electrodeMeansFull: boolean;
  readonly batteryFloorPct: number | null;
  readonly inverterW: number | null;
  readonly houseW: number;
}
