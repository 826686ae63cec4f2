/**
 * A cycle record as one narrow row. SQLite keeps an integer in as few bytes as it needs, so each number is stored as
 * a whole multiple of a step that is finer than any probe (below), times as milliseconds before or after the
 * record, and words by their number in a dictionary. `asStored` gives the record back as the row will give it:
 * whoever shows a record shows that one, so what is shown is what was stored.
 */
import { RimeholdError } from '../errors.ts';
import type { CycleRecord } from '../record.ts';

export type Field = Exclude<keyof CycleRecord, 'atMs'>;
type Code =
  /** Whole multiples of 1/`per`; null allowed where the record allows it. */
  | { readonly kind: 'number'; readonly per: number; readonly nullable: boolean }
  /** Exact milliseconds relative to `atMs`. */
  | { readonly kind: 'instant' }
  | { readonly kind: 'truth' }
  | { readonly kind: 'word' }
  /** A sentence whose figures change while its words stay. */
  | { readonly kind: 'sentence' };

const known = (per: number): Code => ({ kind: 'number', per, nullable: false });
const maybe = (per: number): Code => ({ kind: 'number', per, nullable: true });
const instant: Code = { kind: 'instant' };
const word: Code = { kind: 'word' };

/** Steps: 1 mK, 0.1 W, 1 Wh, 1 g, 0.01 % or L/min, 0.00001 money/kWh, 0.000001 K·h. */
const CODES: Readonly<Record<Field, Code>> = {
  spanMs: known(1),
  clock: word,
  leavingWaterC: maybe(1000),
  enteringWaterC: maybe(1000),
  bankTopC: maybe(1000),
  bankMiddleC: maybe(1000),
  bankBottomC: maybe(1000),
  bankLevelMm: maybe(10),
  bankSurroundC: maybe(1000),
  coolantSupplyC: maybe(1000),
  coolantReturnC: maybe(1000),
  loopFlowLPerMin: maybe(100),
  chillerPowerW: maybe(10),
  pumpPowerW: maybe(10),
  fanPowerW: maybe(10),
  roomC: maybe(1000),
  roomHumidityPct: maybe(100),
  outdoorC: maybe(1000),
  outdoorHumidityPct: maybe(100),
  panelPowerW: maybe(10),
  batteryPct: maybe(100),
  generatorPowerW: maybe(10),
  housePowerW: maybe(10),
  gridPowerW: maybe(10),
  pointsStale: word,
  iceOnHandKwh: known(1000),
  iceOnHandLowKwh: known(1000),
  iceOnHandHighKwh: known(1000),
  iceKg: known(1000),
  inventoryPct: known(100),
  phase: word,
  waterC: known(1000),
  heatLeakWPerK: known(10_000),
  chargingW: known(10),
  dischargingW: known(10),
  leakW: known(10),
  deliveredW: maybe(10),
  latentW: maybe(10),
  priceMoneyPerKwh: maybe(100_000),
  pricePeriod: word,
  strategy: word,
  planMadeMs: instant,
  planOutcome: word,
  eveningLoadKwh: maybe(1000),
  eveningLoadHighKwh: maybe(1000),
  worthOfIceMoneyPerKwh: maybe(100_000),
  waitCostMoney: maybe(10_000),
  nextChangeMs: instant,
  lastsUntilMs: instant,
  requested: word,
  command: word,
  reason: { kind: 'sentence' },
  heldBackBy: { kind: 'sentence' },
  wish: word,
  wishUntilMs: instant,
  mode: word,
  limitC: known(1000),
  home: { kind: 'truth' },
  warmKh: known(1_000_000),
  feelsLikeC: maybe(1000),
};

// oxlint-disable-next-line typescript/no-unsafe-type-assertion -- keys of the table above
const FIELDS = Object.keys(CODES) as Field[];
const figuresColumn = (field: Field): string => `${field}Figures`;

/**
 * Columns of `cycles` beside `atMs`, in the order of a row, each with its SQL type. The type matters: a JavaScript
 * number arrives as a double, and only a column of type INTEGER turns it into the few bytes of a whole number.
 */
export const RECORD_COLUMNS: ReadonlyMap<string, 'INTEGER' | 'TEXT'> = new Map(
  FIELDS.flatMap((field) => [
    [field, 'INTEGER'] as const,
    ...(CODES[field].kind === 'sentence' ? [[figuresColumn(field), 'TEXT'] as const] : []),
  ]),
);

export type Cell = number | string | null;
/** The dictionary: a number for a text, and back. */
export interface Dictionary {
  idOf(text: string): number;
  textOf(id: number): string;
}

const FIGURE = /\d+(?:[.,:]\d+)*/g;
const HOLE = '\u0001';

/** "11 ct until 06:00" → words with holes, and "11|06:00". A text that has the hole's own character stays whole. */
export function splitFigures(text: string): { words: string; figures: string | null } {
  if (text.includes(HOLE)) return { words: text, figures: null };
  return { words: text.replace(FIGURE, HOLE), figures: (text.match(FIGURE) ?? []).join('|') };
}

export function joinFigures(words: string, figures: string | null): string {
  if (figures === null) return words;
  const parts = figures.split('|');
  let next = 0;
  return words.replaceAll(HOLE, () => parts[next++] ?? '');
}

/** The row of a record, `atMs` first. Throws `internal` on a number that is none: a fault of ours to be seen. */
export function toRow(record: CycleRecord, dictionary: Dictionary): Cell[] {
  const row: Cell[] = [record.atMs];
  for (const field of FIELDS) row.push(...toCells(record, field, dictionary));
  return row;
}

function toCells(record: CycleRecord, field: Field, dictionary: Dictionary): Cell[] {
  const code = CODES[field];
  const value = record[field];
  if (code.kind === 'truth') return [value === true ? 1 : 0];
  if (code.kind === 'word') return [dictionary.idOf(String(value))];
  if (code.kind === 'sentence') {
    const { words, figures } = splitFigures(String(value));
    return [dictionary.idOf(words), figures];
  }
  if (value === null && (code.kind === 'instant' || code.nullable)) return [null];
  return [code.kind === 'instant' ? whole(value, 1, field) - record.atMs : whole(value, code.per, field)];
}

function whole(value: unknown, per: number, field: Field): number {
  const scaled = typeof value === 'number' ? Math.round(value * per) + 0 : Number.NaN;
  if (!Number.isSafeInteger(scaled)) {
    throw new RimeholdError(
      'internal',
      `Expected a number in ${field} of a cycle record, found ${String(value)}.`,
      {
        field,
      },
    );
  }
  return scaled;
}

/** The record of a row. Columns that did not exist when the row was written read as null, 0, false or empty. */
export function fromRow(row: readonly Cell[], dictionary: Dictionary): CycleRecord {
  const atMs = Number(row[0]);
  const record: Record<string, number | string | boolean | null> = { atMs };
  let at = 1;
  for (const field of FIELDS) {
    const code = CODES[field];
    const cell = row[at++];
    const figures = code.kind === 'sentence' ? row[at++] : null;
    record[field] = fromCell(code, cell, figures, atMs, dictionary);
  }
  // oxlint-disable-next-line typescript/no-unsafe-type-assertion -- built from the table of all fields
  return record as unknown as CycleRecord;
}

function fromCell(
  code: Code,
  cell: Cell,
  figures: Cell,
  atMs: number,
  dictionary: Dictionary,
): number | string | boolean | null {
  if (code.kind === 'truth') return cell === 1;
  if (code.kind === 'word') return cell === null ? '' : dictionary.textOf(Number(cell));
  if (code.kind === 'sentence') {
    return cell === null
      ? ''
      : joinFigures(dictionary.textOf(Number(cell)), figures === null ? null : String(figures));
  }
  if (code.kind === 'instant') return cell === null ? null : Number(cell) + atMs;
  if (cell === null) return code.nullable ? null : 0;
  return Number(cell) / code.per;
}

/** The record as its row will give it back: words pass unchanged, numbers come to their step. */
export function asStored(record: CycleRecord): CycleRecord {
  const kept: Record<string, unknown> = { ...record };
  for (const field of FIELDS) {
    const code = CODES[field];
    const value = record[field];
    if (code.kind === 'number' && value !== null) kept[field] = whole(value, code.per, field) / code.per;
    if (code.kind === 'instant' && value !== null) kept[field] = whole(value, 1, field);
  }
  // oxlint-disable-next-line typescript/no-unsafe-type-assertion -- a record with its own numbers, rounded
  return kept as unknown as CycleRecord;
}
