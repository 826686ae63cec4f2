/**
 * Error trajectories: how the forecasts issued at this time of day went wrong, hour by hour, all kinds together. A
 * scenario takes a whole one, so it hangs together in time and between temperature, sun and cabin. Until enough are
 * known the rest are first-order autoregressive draws.
 */
import type { Random } from '../numerics/random.ts';
import { ISSUE_EVERY_HOURS, type Issue } from './issues.ts';

/** Errors (what came less what was forecast) by lead from 1. */
export interface Trajectory {
  readonly outdoorC: Float64Array;
  readonly dewC: Float64Array;
  readonly skyScore: Float64Array;
  readonly disturbanceW: Float64Array;
}

/** Error of one kind for an issue and lead; null where it is not known what came. */
export type ErrorAt = (issue: Issue, lead: number) => number | null;

export interface Happened {
  readonly outdoor: ErrorAt;
  readonly dew: ErrorAt;
  readonly skyScore: ErrorAt;
  readonly disturbance: ErrorAt;
}

/** Spread far ahead and hourly persistence of draws for a site without history. */
const DRAWN = {
  outdoorC: { sd: 3, keep: 0.94 },
  dewC: { sd: 2.5, keep: 0.95 },
  skyScore: { sd: 1, keep: 0.9 },
  disturbanceW: { sd: 90, keep: 0.85 },
} as const;
/**
 * A month holds some ten spells of weather, and skies of one spell are alike: what comes strays further than they did.
 * Student's t with 9 degrees of freedom at 80 %, 1.383 √(1 + 1/10), over the normal 1.282. Temperatures, which the site's
 * season moves too, stray enough as they are (the benchmark's 80 % interval holds 81 to 82 % of them).
 */
const SKY_STRAYS = 1.13;
/** Share of an issue's hours that must be known. */
const LEAST_KNOWN = 0.8;
/** Trajectories are sorted by their mean error over a day and picked evenly: fewer of them tell as much. */
const SORT_HOURS = 24;

export function drawTrajectories(
  issues: readonly Issue[],
  happened: Happened,
  nowHour: number,
  leads: number,
  count: number,
  random: Random,
): Trajectory[] {
  const past = issues
    .filter((issue) => sameTimeOfDay(issue.hour, nowHour) && issue.hour + leads <= nowHour)
    .map((issue) => trajectoryOf(issue, happened, leads))
    .filter((trajectory) => trajectory !== null)
    .toSorted((a, b) => meanOf(a.outdoorC) - meanOf(b.outdoorC));
  const fromPast = past.length >= count ? count : past.length;
  const picked = Array.from(
    { length: fromPast },
    (_, i) => past[Math.floor(((i + 0.5) * past.length) / fromPast)],
  );
  const drawn = Array.from({ length: count - fromPast }, (_, k) => drawOne(k, nowHour, leads, random));
  return [...picked, ...drawn];
}

function sameTimeOfDay(hour: number, nowHour: number): boolean {
  const apart = (((nowHour - hour) % 24) + 24) % 24;
  return apart < ISSUE_EVERY_HOURS;
}

const meanOf = (values: Float64Array): number =>
  values.subarray(0, SORT_HOURS).reduce((sum, value) => sum + value, 0);

function trajectoryOf(issue: Issue, happened: Happened, leads: number): Trajectory | null {
  const outdoorC = errors(leads, (lead) => happened.outdoor(issue, lead));
  if (!outdoorC) return null;
  const orZero = (error: ErrorAt): Float64Array =>
    errors(leads, (lead) => error(issue, lead), 0) ?? new Float64Array(leads);
  return {
    outdoorC,
    dewC: orZero(happened.dew),
    skyScore: orZero(happened.skyScore).map((error) => SKY_STRAYS * error),
    disturbanceW: orZero(happened.disturbance),
  };
}

/** Gaps keep the error before them; null when too much is missing. */
function errors(
  leads: number,
  at: (lead: number) => number | null,
  least = LEAST_KNOWN,
): Float64Array | null {
  const values = new Float64Array(leads);
  let known = 0;
  let last = 0;
  for (let lead = 1; lead <= leads; lead += 1) {
    const error = at(lead);
    if (error !== null) known += 1;
    last = error ?? last;
    values[lead - 1] = last;
  }
  return known >= least * leads ? values : null;
}

/**
 * Drawn in pairs of opposite sign, so that few draws have no mean of their own (antithetic variates, Hammersley & Morton
 * 1956). The shock of an hour is drawn for that hour and not for the moment of asking: an hour later the same draws go
 * on, and a plan is not thrown about by fresh ones.
 */
function drawOne(k: number, nowHour: number, leads: number, random: Random): Trajectory {
  const sign = k % 2 === 0 ? 1 : -1;
  const series = (kind: keyof typeof DRAWN): Float64Array => {
    const { sd, keep } = DRAWN[kind];
    const fresh = sign * sd * Math.sqrt(1 - keep * keep);
    const shocks = shocksOf(random.fork(`${kind} ${Math.floor(k / 2)}`), nowHour + 1, leads);
    let value = 0;
    return shocks.map((shock) => (value = keep * value + fresh * shock));
  };
  return {
    outdoorC: series('outdoorC'),
    dewC: series('dewC'),
    skyScore: series('skyScore'),
    disturbanceW: series('disturbanceW'),
  };
}

/** One standard normal for each hour since the epoch, from an hour on; the same for an hour whenever it is asked for. */
function shocksOf(random: Random, fromHour: number, count: number): Float64Array {
  const firstDay = Math.floor(fromHour / 24);
  const days = Math.ceil((fromHour + count) / 24) - firstDay;
  const values = new Float64Array(days * 24);
  for (let day = 0; day < days; day += 1) {
    const ofDay = random.fork(`day ${firstDay + day}`);
    for (let hour = 0; hour < 24; hour += 1) values[day * 24 + hour] = ofDay.normal();
  }
  const skip = fromHour - firstDay * 24;
  return values.slice(skip, skip + count);
}
