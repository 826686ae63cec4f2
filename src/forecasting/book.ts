/** The forecaster's own history and what is read out of it. */
import type { SiteConfig } from '../config.ts';
import { BIN_DAYS, type HourSeries } from './bins.ts';
import type { CabinHour } from './cabin-track.ts';
import { USUAL_CLEARNESS } from './design-weather.ts';
import type { HourLine } from './hour-line.ts';
import { learnPanels, panelClearness, stillStands, type Panels } from './panels.ts';
import { rangeClearness, SunTable } from './sky.ts';

/** Hours that are kept. */
const MOST_HOURS = BIN_DAYS * 24;

export interface WeatherSeries {
  readonly outdoorC: HourSeries;
  readonly dewC: HourSeries;
  readonly clearness: HourSeries;
}

/**
 * The last weeks by hour. A book never changes: a new line makes a new one. What is read out of it is worked out when
 * it is first asked for and kept, for a plan asks several times an hour.
 */
export class Book {
  readonly lines: readonly HourLine[];
  private readonly config: SiteConfig;
  private clearness: readonly (number | null)[] | null = null;
  private hours: readonly CabinHour[] | null = null;
  private readonly series = new Map<number, WeatherSeries>();

  /** The panels as they are known; null when no panel was ever heard and none is named. */
  readonly panels: Panels | null;
  readonly sun: SunTable;

  constructor(config: SiteConfig, lines: readonly HourLine[], before: Book | null = null) {
    this.config = config;
    this.lines = lines;
    this.sun = before?.sun ?? new SunTable(config);
    const known = before?.panels ?? null;
    this.panels =
      known && stillStands(known, this.last?.hour ?? 0) ? known : learnPanels(config, lines, this.sun);
  }

  with(line: HourLine): Book {
    const kept = this.lines.filter((old) => old.hour > line.hour - MOST_HOURS && old.hour < line.hour);
    return new Book(this.config, [...kept, line], this);
  }

  get last(): HourLine | null {
    return this.lines.at(-1) ?? null;
  }

  /** First hour of what is kept; of no meaning in an empty book. */
  get firstHour(): number {
    return this.lines[0]?.hour ?? 0;
  }

  /** Days of outdoor temperature that are known. */
  get daysOfWeather(): number {
    return this.lines.filter((line) => line.outdoorC !== null).length / 24;
  }

  /** Weather up to an hour, one value an hour, null where there is none. */
  weatherTo(toHour: number): WeatherSeries {
    const known = this.series.get(toHour) ?? this.readWeather(toHour);
    this.series.set(toHour, known);
    return known;
  }

  /** What moved the cabin, hour by hour from the first to the last without a gap in the count. */
  get cabinHours(): readonly CabinHour[] {
    this.hours ??= this.readCabin();
    return this.hours;
  }

  private get clearnessByLine(): readonly (number | null)[] {
    const { panels, lines, sun } = this;
    const heard = panels !== null && lines.some((line) => line.panelW !== null);
    this.clearness ??= heard
      ? panelClearness(panels, lines, sun)
      : rangeClearness(lines, this.config.site.longitudeDeg);
    return this.clearness;
  }

  private readWeather(toHour: number): WeatherSeries {
    const firstHour = Math.max(this.lines.length > 0 ? this.firstHour : toHour, toHour - MOST_HOURS + 1);
    const of = (pick: (line: HourLine, i: number) => number | null): HourSeries => ({
      firstHour,
      values: spread(this.lines, firstHour, toHour, pick),
    });
    const outdoorC = of((line) => line.outdoorC);
    return {
      outdoorC,
      dewC: withoutHygrometer(
        of((line) => line.dewC),
        outdoorC,
      ),
      clearness: of((_, i) => this.clearnessByLine[i]),
    };
  }

  private readCabin(): CabinHour[] {
    if (this.lines.length === 0) return [];
    const first = this.firstHour;
    const last = this.lines[this.lines.length - 1].hour;
    const hours: CabinHour[] = Array.from({ length: last - first + 1 }, (_, i) => unheard(first + i));
    let clearness = USUAL_CLEARNESS;
    for (const [i, line] of this.lines.entries()) {
      clearness = this.clearnessByLine[i] ?? clearness;
      const { hour, outdoorC, roomC, roomEndC, machineHeatW, home } = line;
      const sunWPerM2 = line.clearWPerM2 * clearness;
      hours[hour - first] = { hour, outdoorC, sunWPerM2, roomC, roomEndC, machineHeatW, home };
    }
    return hours;
  }
}

function spread(
  lines: readonly HourLine[],
  fromHour: number,
  toHour: number,
  pick: (line: HourLine, i: number) => number | null,
): (number | null)[] {
  const values: (number | null)[] = Array.from({ length: Math.max(0, toHour - fromHour + 1) }, () => null);
  for (const [i, line] of lines.entries()) {
    if (line.hour >= fromHour && line.hour <= toHour) values[line.hour - fromHour] = pick(line, i);
  }
  return values;
}

/** Without a hygrometer the dew point stands at the day's lowest temperature (Allen et al. 1998, FAO-56, eq. 48). */
function withoutHygrometer(dewC: HourSeries, outdoorC: HourSeries): HourSeries {
  const heard = dewC.values.filter((value) => value !== null).length;
  if (heard >= Math.min(24, dewC.values.length / 2)) return dewC;
  const values = outdoorC.values.map((_, i) => {
    const day = outdoorC.values.slice(Math.max(0, i - 23), i + 1).filter((value) => value !== null);
    return day.length > 0 ? Math.min(...day) : null;
  });
  return { firstHour: dewC.firstHour, values };
}

const unheard = (hour: number): CabinHour => ({
  hour,
  outdoorC: null,
  sunWPerM2: 0,
  roomC: null,
  roomEndC: null,
  machineHeatW: null,
  home: 0,
});
