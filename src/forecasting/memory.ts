/** What the forecaster keeps over a restart, as JSON. Anything else than its own form counts as no memory at all. */
import type { CabinMemory } from './own-cabin.ts';
import type { HourLine } from './hours.ts';
import type { Issue } from './issues.ts';

export interface ForecasterMemory {
  readonly form: typeof FORM;
  /** One row an hour: the fields of FIELDS in order. */
  readonly hours: readonly (readonly (number | null)[])[];
  readonly issues: readonly Issue[];
  readonly cabin: CabinMemory | null;
}

const FORM = 1;

/** Fields of a line and the digits kept of each. */
const FIELDS = {
  hour: 0,
  outdoorC: 2,
  dewC: 2,
  roomC: 2,
  roomEndC: 2,
  roomW: 5,
  panelW: 1,
  clearWPerM2: 1,
  clearOnPanelsWPerM2: 1,
  machineHeatW: 1,
  sensibleW: 1,
  latentW: 1,
  home: 2,
} as const satisfies Record<keyof HourLine, number>;

const NAMES = Object.keys(FIELDS) as (keyof HourLine)[];

export function packMemory(
  lines: readonly HourLine[],
  issues: readonly Issue[],
  cabin: CabinMemory | null,
): ForecasterMemory {
  const hours = lines.map((line) =>
    NAMES.map((name) => {
      const value = line[name];
      return value === null ? null : Number(value.toFixed(FIELDS[name]));
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
  const lines = memory.hours.map(
    (row) => Object.fromEntries(NAMES.map((name, i) => [name, row[i] ?? null])) as unknown as HourLine,
  );
  return {
    lines: lines.filter((line) => Number.isInteger(line.hour)),
    issues: memory.issues,
    cabin: memory.cabin,
  };
}

function isMemory(memory: unknown): memory is ForecasterMemory {
  return (
    typeof memory === 'object' &&
    memory !== null &&
    'form' in memory &&
    memory.form === FORM &&
    'hours' in memory &&
    Array.isArray(memory.hours) &&
    'issues' in memory &&
    Array.isArray(memory.issues) &&
    'cabin' in memory
  );
}
