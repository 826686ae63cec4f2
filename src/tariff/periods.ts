/**
 * Tariff periods as exact stretches of time. A period is one stretch for each local day on which it begins: from the
 * instant of its `from` reading to the instant of its `to` reading on its end date (never start + duration), so a night
 * of 22:00 to 06:00 is 7 or 9 hours long on change days. Season, weekday and holiday are judged on the start day, in
 * the meter's zone. Where two periods hold at once, the one written first wins. Half-open: `to` itself is outside.
 */
import type { TariffConfig } from '../config.ts';
import { RimeholdError } from '../errors.ts';
import { DAY_MS, MINUTE_MS, fromWallMs, minuteOfClock, utcOffsetMs } from '../time.ts';

export interface Stretch {
  readonly startMs: number;
  readonly endMs: number;
}

/** A stretch with one price throughout; `name` is null where no period holds. */
export interface PricedStretch extends Stretch {
  readonly price: number;
  readonly name: string | null;
}

type Period = TariffConfig['periods'][number];

const WEEKDAYS = ['SU', 'MO', 'TU', 'WE', 'TH', 'FR', 'SA'] as const;

/**
 * The stretches of a local clock range that begin on local days `dayMs` for which `holds` is true and that overlap
 * [fromMs, toMs). `dayMs` is the local midnight written as if it were UTC. `to` at or before `from` is on the next day.
 */
export function clockStretches(
  zone: string,
  from: string,
  to: string,
  fromMs: number,
  toMs: number,
  holds: (dayMs: number) => boolean = () => true,
): Stretch[] {
  const start = minuteOfClock(from);
  const end = minuteOfClock(to) + (minuteOfClock(to) <= start ? 24 * 60 : 0);
  const firstDay = Math.floor((fromMs + utcOffsetMs(zone, fromMs)) / DAY_MS) * DAY_MS - 2 * DAY_MS;
  const stretches: Stretch[] = [];
  for (let dayMs = firstDay; dayMs < toMs + 2 * DAY_MS; dayMs += DAY_MS) {
    if (!holds(dayMs)) continue;
    const stretch = {
      startMs: fromWallMs(zone, dayMs + start * MINUTE_MS),
      endMs: fromWallMs(zone, dayMs + end * MINUTE_MS),
    };
    if (stretch.startMs < toMs && stretch.endMs > fromMs && stretch.startMs < stretch.endMs)
      stretches.push(stretch);
  }
  return stretches;
}

const monthDayOf = (dayMs: number): string => new Date(dayMs).toISOString().slice(5, 10);
const dateOf = (dayMs: number): string => new Date(dayMs).toISOString().slice(0, 10);

/** Whether a day of the year lies in a season of first and last day; a season may run over the new year. */
function inSeason(season: readonly string[] | null, dayMs: number): boolean {
  if (season === null) return true;
  if (season.length !== 2) {
    throw new RimeholdError(
      'config',
      `Expected a season of a first and a last day such as ["06-01", "09-30"], found ${JSON.stringify(season)} in power.tariff.periods; write both days.`,
    );
  }
  const [first, last] = season;
  const day = monthDayOf(dayMs);
  return first <= last ? day >= first && day <= last : day >= first || day <= last;
}

function holdsOn(period: Period, holidays: ReadonlySet<string>, dayMs: number): boolean {
  const holiday = holidays.has(dateOf(dayMs));
  if (period.onHolidays === 'never' && holiday) return false;
  if (period.onHolidays === 'only' && !holiday) return false;
  const weekday = WEEKDAYS[new Date(dayMs).getUTCDay()];
  return (period.days === null || period.days.includes(weekday)) && inSeason(period.season, dayMs);
}

/** The prices over [fromMs, toMs) without a gap, cut wherever they change. Throws `config` on a malformed season. */
export function pricedStretches(
  tariff: TariffConfig,
  zone: string,
  fromMs: number,
  toMs: number,
): PricedStretch[] {
  const holidays = new Set(tariff.holidays);
  const held = tariff.periods.flatMap((period) =>
    clockStretches(zone, period.from, period.to, fromMs, toMs, (day) => holdsOn(period, holidays, day)).map(
      (stretch) => ({ ...stretch, price: period.price, name: period.name }),
    ),
  );
  const cuts = cutsOf(held, fromMs, toMs);
  return cuts.slice(0, -1).map((startMs, i) => {
    const first = held.find((stretch) => stretch.startMs <= startMs && startMs < stretch.endMs);
    return { startMs, endMs: cuts[i + 1], price: first?.price ?? tariff.default, name: first?.name ?? null };
  });
}

/** Sorted distinct instants at which any stretch begins or ends inside [fromMs, toMs], both ends included. */
export function cutsOf(stretches: readonly Stretch[], fromMs: number, toMs: number): number[] {
  const inside = stretches
    .flatMap(({ startMs, endMs }) => [startMs, endMs])
    .filter((at) => at > fromMs && at < toMs);
  return [...new Set([fromMs, ...inside, toMs])].toSorted((a, b) => a - b);
}
