/**
 * The estimated quantities: where each stands in the state vector, what is believed of it before anything is heard,
 * and how slowly it may drift. Gains are natural logarithms of factors on the site file's figures.
 */
import type { PointName } from '../points.ts';
import { GROWTH, type BankModel } from '../plant/bank.ts';

export const X = {
  /** Ice as a fraction of the most the bank may hold. */
  ice: 0,
  /** Water in four layers, °C, from where it enters to where it leaves. In internal melt the first is all of the water and
   * the last the coolant at the end of the coil. */
  top: 1,
  upper: 2,
  lower: 3,
  out: 4,
  /** Where ice melts from the wall it froze on: all within the old ice, and of it what has frozen anew on the wall. */
  hollow: 5,
  rim: 6,
  /** Ice of the first three layers of sealed containers less the mean of all four. */
  firstLess: 7,
  secondLess: 8,
  thirdLess: 9,
  cop: 10,
  /** Change of that gain for each 10 K outdoors above the rating. */
  copOutdoor: 11,
  /** Change of that gain from no ice to full. */
  copIce: 12,
  melt: 13,
  meltExponent: 14,
  meltBend: 15,
  /** What lopsided ice does to melting for some hours. */
  meltNow: 16,
  freeze: 17,
  thickening: 18,
  freezeNow: 19,
  /** Logarithm of a full bank's ice section over the tube's: how the ice's resistance bends. */
  growth: 20,
  leak: 21,
  flow: 22,
  coil: 23,
  /** Half of the coolant's rise through the coil, for each watt, relative to its guess. */
  span: 24,
  power: 25,
  powerIce: 26,
  enteringOffset: 27,
  /** From here on nothing moves the bank: what instruments add. */
  levelZero: 28,
  leavingOffset: 29,
  topOffset: 30,
  middleOffset: 31,
  bottomOffset: 32,
  supplyOffset: 33,
  returnOffset: 34,
} as const;

export const STATES = 35;
/** The layers of water, from where it enters to where it leaves. */
export const LAYERS = [X.top, X.upper, X.lower, X.out] as const;
/** How the ice lies: between wall and old ice, and from layer to layer. Nothing of it where ice melts from outside. */
export const LIE = [X.hollow, X.rim, X.firstLess, X.secondLess, X.thirdLess] as const;

/** Ice of sealed containers by layer, each as a fraction of what a full layer holds. */
export function containerIce(x: Float64Array): number[] {
  const less = [x[X.firstLess], x[X.secondLess], x[X.thirdLess]];
  return [...less, -less[0] - less[1] - less[2]].map((part) => x[X.ice] + part);
}

export function setContainerIce(x: Float64Array, ice: readonly number[]): void {
  x[X.ice] = ice.reduce((sum, part) => sum + part, 0) / ice.length;
  x[X.firstLess] = ice[0] - x[X.ice];
  x[X.secondLess] = ice[1] - x[X.ice];
  x[X.thirdLess] = ice[2] - x[X.ice];
}

/** States before this one drive the process; the others only show in readings. */
export const DYNAMIC = X.levelZero;

export type WetPoint = 'leaving-water' | 'entering-water' | 'bank-top' | 'bank-middle' | 'bank-bottom';
export type ProbePoint = WetPoint | 'coolant-supply' | 'coolant-return';

export const PROBE_OFFSET: Readonly<Record<ProbePoint, number>> = {
  'leaving-water': X.leavingOffset,
  'entering-water': X.enteringOffset,
  'bank-top': X.topOffset,
  'bank-middle': X.middleOffset,
  'bank-bottom': X.bottomOffset,
  'coolant-supply': X.supplyOffset,
  'coolant-return': X.returnOffset,
};
export const PROBE_POINTS = Object.keys(PROBE_OFFSET) as readonly ProbePoint[];

export const isProbe = (point: PointName): point is ProbePoint => Object.hasOwn(PROBE_OFFSET, point);

export interface Priors {
  readonly mean: Float64Array;
  readonly sd: Float64Array;
  /** Time in which a quantity forgets, s: it drifts back to its prior as an Ornstein–Uhlenbeck process. */
  readonly forgetS: Float64Array;
}

const DAY_S = 86_400;
const SLOW_S = 90 * DAY_S;
const HOURS_S = 3 * 3600;

/**
 * [mean, standard deviation, forgetting time]. Spreads are what a nameplate is worth (common practice, no source):
 * COP ±15 %, leak ±40 %, flow ±20 %, probes ±0.5 K at their limits; conductances known to a third.
 * Where ice melts from the wall it froze on, melting follows what has melted since (`hollow.ts`) and the inventory
 * only by the coil that ice still covers; the measured tank strays from that by a fifth for hours.
 * The ice and the water's temperatures are no parameters: their rows are unused here.
 */
function priorRows(bank: BankModel): Readonly<Record<keyof typeof X, readonly [number, number, number]>> {
  const level = bank.config.emptyLevelMm;
  const internal = bank.config.form === 'ice-on-coil-internal';
  const fromWall = internal || bank.config.form === 'sealed-containers';
  return {
    ice: [0.5, 0.3, SLOW_S],
    top: [5, 5, SLOW_S],
    upper: [5, 5, SLOW_S],
    lower: [5, 5, SLOW_S],
    out: [5, 5, SLOW_S],
    hollow: [0, 0, SLOW_S],
    rim: [0, 0, SLOW_S],
    firstLess: [0, 0, SLOW_S],
    secondLess: [0, 0, SLOW_S],
    thirdLess: [0, 0, SLOW_S],
    cop: [0, 0.1, SLOW_S],
    copOutdoor: [0, 0.06, SLOW_S],
    copIce: [0, 0.1, SLOW_S],
    melt: [0, 0.35, SLOW_S],
    meltExponent: [internal ? 0.4 : bank.guess.meltExponent, 0.15, SLOW_S],
    meltBend: [0, 0.2, SLOW_S],
    meltNow: [0, fromWall ? 0.2 : 0.08, HOURS_S],
    freeze: [0, 0.3, SLOW_S],
    thickening: [Math.log(bank.guess.freezeThickening), 0.6, SLOW_S],
    freezeNow: [0, 0.12, HOURS_S],
    growth: [Math.log(GROWTH), 1.2, SLOW_S],
    leak: [0, 0.25, 30 * DAY_S],
    flow: [0, 0.12, SLOW_S],
    coil: [0, 0.25, SLOW_S],
    span: [0, 0.4, SLOW_S],
    power: [0, 0.12, SLOW_S],
    powerIce: [0, 0.1, SLOW_S],
    enteringOffset: [0, 0.3, SLOW_S],
    levelZero: [level ?? 500, level === null ? 300 : 4, 60 * DAY_S],
    leavingOffset: [0, 0.3, SLOW_S],
    topOffset: [0, 0.3, SLOW_S],
    middleOffset: [0, 0.3, SLOW_S],
    bottomOffset: [0, 0.3, SLOW_S],
    supplyOffset: [0, 0.3, SLOW_S],
    returnOffset: [0, 0.3, SLOW_S],
  };
}

export function priorsFor(bank: BankModel): Priors {
  const rows = Object.values(priorRows(bank));
  return {
    mean: Float64Array.from(rows, (row) => row[0]),
    sd: Float64Array.from(rows, (row) => row[1]),
    forgetS: Float64Array.from(rows, (row) => row[2]),
  };
}

/** Width of the coolant's rise through the coil that is guessed, K at the nameplate's ice making; no source. */
export const COOLANT_RISE_K = 3;

/**
 * What a flow meter may err by, as a logarithm (common practice, no source); more where the loop carries brine, whose
 * heat capacity depends on a mixture that the site file does not know: 3,850 to 4,200 J/(kg K).
 */
export const METER_SD = { water: 0.025, brine: 0.06 };
