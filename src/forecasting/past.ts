/** What came of the forecasts issued so far: how to blend, and how wrong they turned out. */
import { blended, learnBlends, type Blend } from './blend.ts';
import type { Book } from './book.ts';
import type { Issue } from './issues.ts';
import { unexplainedAhead } from './own-cabin.ts';
import type { SkyScores } from './sky-score.ts';
import type { Happened } from './trajectories.ts';

export interface Past {
  readonly blends: readonly Blend[];
  readonly happened: Happened;
  readonly disturbanceW: Float64Array;
  /** Issues whose errors are those of the forecast at hand: with or without a hub. */
  comparable(withHub: boolean): readonly Issue[];
}

/** Looks back from `lastHour`. `unexplainedW` begins at the first hour of the book. */
export function lookBack(
  book: Book,
  issues: readonly Issue[],
  lastHour: number,
  leads: number,
  unexplainedW: readonly (number | null)[],
  sky: SkyScores,
): Past {
  const series = book.weatherTo(lastHour);
  const first = series.outdoorC.firstHour;
  const trackFirst = book.last ? book.firstHour : lastHour;
  const outdoorC = (hour: number): number | null => series.outdoorC.values[hour - first] ?? null;
  const blends = learnBlends(issues, outdoorC, leads);
  const expected = new Map<number, Float64Array>();
  const expectedW = (hour: number): Float64Array => {
    const known = expected.get(hour) ?? unexplainedAhead(unexplainedW, hour - trackFirst, leads);
    expected.set(hour, known);
    return known;
  };
  return {
    blends,
    disturbanceW: expectedW(lastHour),
    comparable: (withHub) => issues.filter((issue) => (issue.hubC !== null) === withHub),
    happened: {
      outdoor: (issue, lead) =>
        less(
          outdoorC(issue.hour + lead),
          blended(blends, lead, issue.outdoorC[lead - 1], issue.hubC?.[lead - 1] ?? null),
        ),
      dew: (issue, lead) => less(series.dewC.values[issue.hour + lead - first], issue.dewC[lead - 1]),
      skyScore: (issue, lead) => {
        const hour = issue.hour + lead;
        const clearness = series.clearness.values[hour - first] ?? null;
        return less(clearness === null ? null : sky.scoreOf(hour, clearness), issue.skyScore[lead - 1]);
      },
      disturbance: (issue, lead) =>
        less(unexplainedW[issue.hour + lead - trackFirst], expectedW(issue.hour)[lead - 1]),
    },
  };
}

function less(actual: number | null | undefined, forecast: number | undefined): number | null {
  return actual == null || forecast === undefined ? null : actual - forecast;
}
