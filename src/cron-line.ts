/**
 * The cron lines of the owner's timetable: five fields, each `*` or a list of values and ranges, either with a step.
 * Checked when the site file is read, so that a line which would never fire is found by day and not by a warm evening.
 */

interface Field {
  readonly name: string;
  readonly least: number;
  readonly most: number;
  readonly names: readonly string[];
}

const MONTHS = ['JAN', 'FEB', 'MAR', 'APR', 'MAY', 'JUN', 'JUL', 'AUG', 'SEP', 'OCT', 'NOV', 'DEC'];
const WEEKDAYS = ['SUN', 'MON', 'TUE', 'WED', 'THU', 'FRI', 'SAT'];

const FIELDS: readonly Field[] = [
  { name: 'minute', least: 0, most: 59, names: [] },
  { name: 'hour', least: 0, most: 23, names: [] },
  { name: 'day of the month', least: 1, most: 31, names: [] },
  { name: 'month', least: 1, most: 12, names: MONTHS },
  { name: 'weekday', least: 0, most: 7, names: WEEKDAYS },
];

/** What is wrong with a line of five fields, as a sentence of expected and found; null when it is sound. */
export function cronFault(line: string): string | null {
  const written = line.trim().split(/\s+/);
  const wrong = FIELDS.findIndex((field, k) => !written[k].split(',').every((part) => isPart(field, part)));
  if (wrong < 0) return neverFires(written) ? neverSentence(line) : null;
  const { name, least, most, names } = FIELDS[wrong];
  const word = names.length > 0 ? ` or ${names[0]} to ${names[names.length - 1]}` : '';
  return `expected the ${name} as ${least} to ${most}${word}, a range, a list or *, found "${written[wrong]}" in "${line}"`;
}

function isPart(field: Field, part: string): boolean {
  const match = /^([^/]+)(?:\/(\d+))?$/.exec(part);
  if (!match || (match[2] !== undefined && !(Number(match[2]) >= 1 && Number(match[2]) <= field.most)))
    return false;
  if (match[1] === '*') return true;
  const ends = match[1].split('-').map((end) => valueOf(field, end));
  if (ends.length > 2 || ends.some((end) => end === null)) return false;
  // A step counts through a range; from a bare value on it means different things to different programs.
  if (ends.length === 1) return match[2] === undefined;
  return Number(ends[0]) <= Number(ends[1]);
}

function valueOf(field: Field, text: string): number | null {
  const named = field.names.indexOf(text.toUpperCase());
  const value = named >= 0 ? named + field.least : /^\d{1,2}$/.test(text) ? Number(text) : Number.NaN;
  return value >= field.least && value <= field.most ? value : null;
}

const LONGEST = [31, 29, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31];

/** A day that none of its months has, where no weekday fires it in its place. */
function neverFires([, , day, month, weekday]: readonly string[]): boolean {
  if (weekday !== '*' || !/^\d+(,\d+)*$/.test(day) || !/^\w+(,\w+)*$/.test(month)) return false;
  const first = Math.min(...day.split(',').map(Number));
  return month.split(',').every((one) => first > LONGEST[(valueOf(FIELDS[3], one) ?? 1) - 1]);
}

const neverSentence = (line: string): string =>
  `expected a day that the month has, found "${line}", which never comes`;
