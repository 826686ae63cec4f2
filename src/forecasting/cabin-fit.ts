/**
 * Identification of the cabin from its own hours: maximum a posteriori by Gauss–Newton on the logarithms of the seven
 * physical values and on the heat of people and the hourly gains, which are linear. The prior is the site file.
 * The error is that of the room temperature one hour ahead. Days with open windows are found and left out: heat that
 * is unexplained and goes with the difference to outdoors, far above the scatter of other days.
 */
import { hourOfDay } from './bins.ts';
import { lossWPerK, type CabinParameters } from './cabin.ts';
import { trackCabin, type CabinHour } from './cabin-track.ts';
import { addRow, normalEquations, solveNormal } from './normal-equations.ts';

const PHYSICAL = [
  'airJPerK',
  'fabricJPerK',
  'airFabricWPerK',
  'airOutdoorWPerK',
  'fabricOutdoorWPerK',
  'airApertureM2',
  'fabricApertureM2',
] as const;
/** Prior spread: of the logarithms, of the heat of people, of the hourly gains, W. */
const LOG_SD = 0.7;
const HOME_SD_W = 80;
const GAIN_SD_W = 120;
/** No value leaves this factor round the site file's. */
const MOST_FACTOR = 8;
/** Errors of neighbouring hours go together: one hour counts as this part of an independent one. */
const ROW_WEIGHT = 1 / 4;
/** Quantised thermometers leave at least this error, K. */
const LEAST_ERROR_K = 0.06;
const ROUNDS = 6;
/** Hours that are judged together for open windows, and the least difference to outdoors that tells, K. */
const BLOCK_HOURS = 6;
const TELLING_K = 1.5;

export interface CabinFit {
  readonly parameters: CabinParameters;
  /** Days (hours / 24) that were refused as open-window days. */
  readonly refusedDays: readonly number[];
  /** Hours that were learned from. */
  readonly learnedHours: number;
}

/** Fits to hours in order; gives the prior back when there is too little to learn from. */
export function fitCabin(prior: CabinParameters, hours: readonly CabinHour[]): CabinFit {
  const first = fitTo(prior, hours, new Set());
  const refused = openWindowDays(first, hours);
  const parameters = refused.size > 0 ? fitTo(prior, hours, refused) : first;
  const unexplained = trackCabin(parameters, hours).unexplainedW;
  const learnedHours = unexplained.filter(
    (value, i) => value !== null && !refused.has(dayOf(hours[i])),
  ).length;
  return { parameters, refusedDays: [...refused], learnedHours };
}

const dayOf = (hour: CabinHour): number => Math.floor(hour.hour / 24);

type Vector = Float64Array;
const SIZE = PHYSICAL.length + 1 + 24;

function toVector(prior: CabinParameters, p: CabinParameters): Vector {
  return Float64Array.from([
    ...PHYSICAL.map((name) => Math.log(Math.max(p[name], 1e-9) / Math.max(prior[name], 1e-9))),
    p.homeW,
    ...p.gainsW,
  ]);
}

function fromVector(prior: CabinParameters, vector: Vector): CabinParameters {
  const bound = Math.log(MOST_FACTOR);
  const factor = (i: number): number => Math.exp(Math.min(bound, Math.max(-bound, vector[i])));
  const physical = Object.fromEntries(PHYSICAL.map((name, i) => [name, prior[name] * factor(i)]));
  return {
    ...prior,
    ...physical,
    homeW: Math.max(0, vector[PHYSICAL.length]),
    gainsW: Array.from(vector.subarray(PHYSICAL.length + 1)),
  };
}

function fitTo(
  prior: CabinParameters,
  hours: readonly CabinHour[],
  refused: ReadonlySet<number>,
): CabinParameters {
  const start = toVector(prior, prior);
  const precision = Float64Array.from({ length: SIZE }, (_, i) =>
    i < PHYSICAL.length ? LOG_SD ** -2 : i === PHYSICAL.length ? HOME_SD_W ** -2 : GAIN_SD_W ** -2,
  );
  let vector = start;
  for (let round = 0; round < ROUNDS; round += 1) {
    const next = improve(prior, start, precision, vector, hours, refused);
    if (!next) break;
    vector = next;
  }
  return fromVector(prior, vector);
}

/** How much heat moves the room by a kelvin over an hour: turns unexplained heat into an error of temperature. */
const wattsPerKelvin = (p: CabinParameters): number =>
  p.airJPerK / 3600 + (p.airFabricWPerK + p.airOutdoorWPerK) / 2;

/** Temperature errors with one value of the physical ones moved a little. */
function errorsAt(prior: CabinParameters, vector: Vector, hours: readonly CabinHour[]): (number | null)[] {
  const p = fromVector(prior, vector);
  const scale = wattsPerKelvin(p);
  return trackCabin(p, hours).unexplainedW.map((watts) => (watts === null ? null : watts / scale));
}

const NUDGE = 0.01;

/** One Gauss–Newton round with Huber weights; null without rows. */
function improve(
  prior: CabinParameters,
  start: Vector,
  precision: Vector,
  vector: Vector,
  hours: readonly CabinHour[],
  refused: ReadonlySet<number>,
): Vector | null {
  const errors = errorsAt(prior, vector, hours);
  const nudged = PHYSICAL.map((_, i) =>
    errorsAt(
      prior,
      Float64Array.from(vector, (value, j) => value + (j === i ? NUDGE : 0)),
      hours,
    ),
  );
  const errorK = Math.max(LEAST_ERROR_K, typicalSize(errors));
  const perWatt = 1 / wattsPerKelvin(fromVector(prior, vector));
  const equations = normalEquations(start, precision);
  let rows = 0;
  for (const [n, error] of errors.entries()) {
    if (error === null || refused.has(dayOf(hours[n]))) continue;
    const row = new Float64Array(SIZE);
    for (let i = 0; i < PHYSICAL.length; i += 1) row[i] = ((nudged[i][n] ?? error) - error) / NUDGE;
    row[PHYSICAL.length] = -perWatt * hours[n].home;
    row[PHYSICAL.length + 1 + hourOfDay(hours[n].hour)] = -perWatt;
    const huber = Math.min(1, (1.5 * errorK) / Math.max(1e-9, Math.abs(error)));
    // linearised: error + row · (next − vector) = 0
    const target = row.reduce((sum, value, i) => sum + value * vector[i], -error);
    addRow(equations, row, target, (ROW_WEIGHT * huber) / errorK ** 2);
    rows += 1;
  }
  return rows > 0 ? damped(vector, solveNormal(equations)) : null;
}

/** No logarithm moves by more than one in a round. */
function damped(vector: Vector, next: Vector | null): Vector | null {
  if (!next) return null;
  return next.map((value, i) =>
    i < PHYSICAL.length ? vector[i] + Math.min(1, Math.max(-1, value - vector[i])) : value,
  );
}

/** A robust standard deviation: 1.4826 times the median of the absolute values. */
function typicalSize(values: readonly (number | null)[]): number {
  const sizes = values
    .filter((value) => value !== null)
    .map(Math.abs)
    .toSorted((a, b) => a - b);
  return sizes.length === 0 ? 0 : 1.4826 * sizes[Math.floor(sizes.length / 2)];
}

function openWindowDays(p: CabinParameters, hours: readonly CabinHour[]): Set<number> {
  const { unexplainedW } = trackCabin(p, hours);
  const scatterW = Math.max(60, typicalSize(unexplainedW));
  const loss = lossWPerK(p);
  const days = new Set<number>();
  for (let begin = 0; begin < hours.length; begin += BLOCK_HOURS) {
    const block = hours.slice(begin, begin + BLOCK_HOURS);
    const through = openConductance(block, unexplainedW.slice(begin, begin + BLOCK_HOURS));
    if (through && through.wattsPerK > 0.7 * loss && through.meanW > 2.5 * scatterW)
      days.add(dayOf(block[0]));
  }
  return days;
}

/** Conductance to outdoors that would explain a block's unexplained heat, and how much heat that is. */
function openConductance(
  block: readonly CabinHour[],
  unexplainedW: readonly (number | null)[],
): { wattsPerK: number; meanW: number } | null {
  let across = 0;
  let squares = 0;
  let count = 0;
  for (const [i, watts] of unexplainedW.entries()) {
    const { outdoorC, roomC } = block[i];
    if (watts === null || outdoorC === null || roomC === null) continue;
    const differenceK = outdoorC - roomC;
    if (Math.abs(differenceK) < TELLING_K) continue;
    across += watts * differenceK;
    squares += differenceK * differenceK;
    count += 1;
  }
  if (count < 3) return null;
  return { wattsPerK: across / squares, meanW: across / Math.sqrt(squares * count) };
}
