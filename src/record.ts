/**
 * What every cycle and every plan leaves behind. Store, page, night sheet and rehearsal read only these:
 * what is shown is what was stored. Flat on purpose; null means "not known then".
 */
import type { Command, Mode, Phase, Strategy, WishName } from './commands.ts';

/** Whether the wall clock can be trusted: a small board without a battery wakes up in 1970. */
export type ClockState = 'set' | 'doubtful';

/** Everything behind one cycle's decision. Powers are means over the cycle, positive as named. */
export interface CycleRecord {
  readonly atMs: number;
  /** Time that this record stands for, back from `atMs`. */
  readonly spanMs: number;
  readonly clock: ClockState;

  // heard (null when missing or stale); rooms are the mean of those heard
  readonly leavingWaterC: number | null;
  readonly enteringWaterC: number | null;
  readonly bankTopC: number | null;
  readonly bankMiddleC: number | null;
  readonly bankBottomC: number | null;
  readonly bankLevelMm: number | null;
  readonly bankSurroundC: number | null;
  readonly coolantSupplyC: number | null;
  readonly coolantReturnC: number | null;
  readonly loopFlowLPerMin: number | null;
  readonly chillerPowerW: number | null;
  readonly pumpPowerW: number | null;
  readonly fanPowerW: number | null;
  readonly roomC: number | null;
  readonly roomHumidityPct: number | null;
  readonly outdoorC: number | null;
  readonly outdoorHumidityPct: number | null;
  readonly panelPowerW: number | null;
  readonly batteryPct: number | null;
  readonly generatorPowerW: number | null;
  readonly housePowerW: number | null;
  readonly gridPowerW: number | null;
  /** Stale or missing configured points, comma between. */
  readonly pointsStale: string;

  // estimated
  readonly iceOnHandKwh: number;
  readonly iceOnHandLowKwh: number;
  readonly iceOnHandHighKwh: number;
  readonly iceKg: number;
  readonly inventoryPct: number;
  readonly phase: Phase;
  readonly waterC: number;
  readonly heatLeakWPerK: number;
  /** Heat taken out of the bank by the ice machine. */
  readonly chargingW: number;
  /** Heat brought into the bank by the melt-water loop. */
  readonly dischargingW: number;
  /** Heat leaking into the bank. */
  readonly leakW: number;
  /** Heat that the coil took from the rooms, and the part of it that is moisture; null without flow. */
  readonly deliveredW: number | null;
  readonly latentW: number | null;

  // priced and planned
  readonly priceMoneyPerKwh: number | null;
  readonly pricePeriod: string;
  readonly strategy: Strategy;
  readonly planMadeMs: number | null;
  readonly planOutcome: PlanOutcome;
  readonly eveningLoadKwh: number | null;
  readonly eveningLoadHighKwh: number | null;
  readonly worthOfIceMoneyPerKwh: number | null;
  readonly waitCostMoney: number | null;
  readonly nextChangeMs: number | null;
  readonly lastsUntilMs: number | null;

  // decided
  readonly requested: Command;
  readonly command: Command;
  readonly reason: string;
  readonly heldBackBy: string;
  readonly wish: WishName;
  readonly wishUntilMs: number | null;
  readonly mode: Mode;

  // comfort
  readonly limitC: number;
  readonly home: boolean;
  /** Degree-hours above the limit gathered in this cycle while somebody was home. */
  readonly warmKh: number;
  readonly feelsLikeC: number | null;
}

/** How a plan came about: solved afresh, the last one shifted, or the safe timetable. */
export type PlanOutcome = 'solved' | 'shifted' | 'timetable' | 'none';

/** One step of a plan. Ice on hand is at the start of the step. */
export interface PlanStep {
  readonly startMs: number;
  readonly command: Command;
  readonly iceKwh: number;
  readonly iceLowKwh: number;
  readonly iceHighKwh: number;
  readonly priceMoneyPerKwh: number;
  readonly outdoorC: number;
  readonly outdoorLowC: number;
  readonly outdoorHighC: number;
  readonly loadW: number;
  readonly loadLowW: number;
  readonly loadHighW: number;
}

/** What it thought when it planned; low and high are the 10th and 90th percentiles of the scenarios. */
export interface PlanRecord {
  readonly madeMs: number;
  readonly outcome: PlanOutcome;
  readonly strategy: Strategy;
  readonly slotMs: number;
  readonly steps: readonly PlanStep[];
  readonly expectedCostMoney: number;
  readonly worthOfIceMoneyPerKwh: number;
  readonly waitCostMoney: number;
  readonly reason: string;
  /** Sentences beside it: what waiting costs, what ice is worth, what would change its mind. Older plans have none. */
  readonly asides?: readonly string[];
  readonly forecastKnows: string;
}
