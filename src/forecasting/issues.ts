/**
 * Past forecasts as they were issued, kept to learn how wrong they turn out: the hub's bias and spread by lead, how to
 * blend it with the own one, and whole error trajectories from which scenarios are drawn.
 */
import type { HoursAhead } from './own-weather.ts';

/** Hours between issues that are kept, and how long they are: errors of last season would be too wide or too narrow. */
export const ISSUE_EVERY_HOURS = 3;
export const ISSUE_DAYS = 30;

export interface Issue {
  /** Last whole hour known at issue; lead 1 is the hour after it. */
  readonly hour: number;
  readonly outdoorC: readonly number[];
  readonly dewC: readonly number[];
  /** Score of clearness among what the hour of the day had lately (`sky-score.ts`). */
  readonly skyScore: readonly number[];
  /** The hub's temperatures for the same leads; null where it gave none. */
  readonly hubC: readonly (number | null)[] | null;
}

const round = (value: number, digits: number): number => Number(value.toFixed(digits));

const rounded = (values: Float64Array, digits: number): number[] =>
  Array.from(values, (value) => round(value, digits));

export function issueOf(hour: number, ahead: HoursAhead, hubC: readonly (number | null)[] | null): Issue {
  return {
    hour,
    outdoorC: rounded(ahead.outdoorC, 2),
    dewC: rounded(ahead.dewC, 1),
    skyScore: rounded(ahead.skyScore, 3),
    hubC: hubC?.map((value) => (value === null ? null : round(value, 2))) ?? null,
  };
}

/** Drops issues that are too old; keeps a new one when the last is `ISSUE_EVERY_HOURS` old. */
export function keepIssue(issues: readonly Issue[], issue: Issue): Issue[] {
  const last = issues.at(-1);
  if (last && issue.hour < last.hour + ISSUE_EVERY_HOURS) return [...issues];
  return [...issues.filter((old) => old.hour > issue.hour - ISSUE_DAYS * 24), issue];
}
