/** What the forecaster keeps over a restart, as JSON. Anything else than its own form counts as no memory at all. */
import type { CabinMemory } from './own-cabin.ts';
import type { HourLine } from './hour-line.ts';
import type { Issue } from './issues.ts';

export interface ForecasterMemory {
  readonly form: typeof FORM;
  /** One row an hour: the fields of FIELDS in order. */
  readonly hours: readonly (readonly (number | null)[])[];
  readonly issues: readonly Issue[];
  readonly cabin: CabinMemory | null;
}

const FORM = 2;

/** The fields of a line in the order that they are kept in, with the digits kept of each. */
const FIELDS = [
  ['hour', 0],
  ['outdoorC', 2],
  ['dewC', 2],
  ['roomC', 2],
  ['roomEndC', 2],
  ['roomW', 5],
  ['panelW', 1],
  ['clearWPerM2', 1],
  ['machineHeatW', 1],
  ['sensibleW', 1],
  ['latentW', 1],
  ['home', 2],
] as const satisfies readonly (readonly [keyof HourLine, number])[];

export function packMemory(
  lines: readonly HourLine[],
  issues: readonly Issue[],
  cabin: CabinMemory | null,
): ForecasterMemory {
  const hours = lines.map((line) =>
    FIELDS.map(([name, digits]) => {
      const value = line[name];
      return value === null ? null : Number(value.toFixed(digits));
    }),
  );
  return { form: FORM, hours, issues, cabin };
}

export interface Unpacked {
  readonly lines: readonly HourLine[];
  readonly issues: readonly Issue[];
  readonly cabin: CabinMemory | null;
}

/** null when it is not a memory of this form. */
export function unpackMemory(memory: unknown): Unpacked | null {
  if (!isMemory(memory)) return null;
  return { lines: memory.hours.map(lineOf), issues: memory.issues, cabin: memory.cabin };
}

function lineOf(row: readonly (number | null)[]): HourLine {
  const [
    hour,
    outdoorC,
    dewC,
    roomC,
    roomEndC,
    roomW,
    panelW,
    clear,
    machineHeatW,
    sensibleW,
    latentW,
    home,
  ] = row;
  return {
    hour: hour ?? 0,
    outdoorC,
    dewC,
    roomC,
    roomEndC,
    roomW,
    panelW,
    clearWPerM2: clear ?? 0,
    machineHeatW,
    sensibleW: sensibleW ?? 0,
    latentW,
    home: home ?? 0,
  };
}

const isNumberOrNull = (value: unknown): boolean => value === null || Number.isFinite(value);
const isRow = (row: unknown): boolean =>
  Array.isArray(row) && row.length === FIELDS.length && Number.isInteger(row[0]) && row.every(isNumberOrNull);
const isIssue = (issue: unknown): boolean =>
  typeof issue === 'object' &&
  issue !== null &&
  'hour' in issue &&
  Number.isInteger(issue.hour) &&
  'outdoorC' in issue &&
  Array.isArray(issue.outdoorC) &&
  'dewC' in issue &&
  Array.isArray(issue.dewC) &&
  'skyScore' in issue &&
  Array.isArray(issue.skyScore) &&
  'hubC' in issue;
const isCabin = (cabin: unknown): boolean =>
  cabin === null || (typeof cabin === 'object' && 'parameters' in cabin && 'refusedDays' in cabin);

function isMemory(memory: unknown): memory is ForecasterMemory {
  return (
    typeof memory === 'object' &&
    memory !== null &&
    'form' in memory &&
    memory.form === FORM &&
    'hours' in memory &&
    Array.isArray(memory.hours) &&
    memory.hours.every(isRow) &&
    'issues' in memory &&
    Array.isArray(memory.issues) &&
    memory.issues.every(isIssue) &&
    'cabin' in memory &&
    isCabin(memory.cabin)
  );
}
