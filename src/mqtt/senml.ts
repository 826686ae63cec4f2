/**
 * SenML, JSON form: resolution of a pack into absolute records (RFC 8428 sections 4.5 and 4.6), versions after
 * RFC 9100. Unit names are left as they came; `senmlUnit` maps those that mean something else outside SenML.
 */

/** Times below 2^28 s are relative to now (RFC 8428 section 4.5.3). */
const ABSOLUTE_FROM_S = 2 ** 28;
/** Versions up to 10 are the base standard; 26 = 10 + 2^4 adds secondary units (RFC 9100, RFC 8798). */
const BASE_VERSION = 10;
const SECONDARY_UNITS_VERSION = 26;
const NAME = /^[A-Za-z0-9][A-Za-z0-9\-:./_]*$/;

export interface SenmlRecord {
  readonly name: string;
  readonly unit: string | null;
  /** Number, text, truth value or base64url data as text; null when the record carries a sum only. */
  readonly value: number | string | boolean | null;
  readonly sum: number | null;
  readonly timeS: number;
  /** Whether the sender gave the time itself; a relative time counts from when the pack was heard. */
  readonly ownTime: boolean;
  /** Longest time until the sender's next update. */
  readonly updateS: number | null;
}

export type SenmlPack =
  | { readonly ok: true; readonly records: readonly SenmlRecord[] }
  | { readonly ok: false; readonly fault: string };

type Labels = Record<string, unknown>;

const NUMBERS = ['bt', 'bv', 'bs', 'bver', 'v', 's', 't', 'ut'] as const;
const TEXTS = ['bn', 'bu', 'n', 'u', 'vs', 'vd'] as const;
const VALUES = ['v', 'vs', 'vb', 'vd'] as const;

/** A fault inside one record; turned into the pack's fault sentence. */
class RecordFault extends Error {}

/**
 * Resolves a parsed JSON pack heard at `nowS` (Unix seconds) into records in chronological order.
 * A pack with any faulty record is refused whole: half a pack has no trustworthy base values.
 */
export function resolveSenml(pack: unknown, nowS: number): SenmlPack {
  if (!Array.isArray(pack)) return { ok: false, fault: 'expected a SenML pack (a JSON array of records)' };
  const base: Labels = {};
  const records: SenmlRecord[] = [];
  for (const [index, raw] of pack.entries()) {
    try {
      const record = resolveRecord(raw, base, nowS);
      if (record) records.push(record);
    } catch (error) {
      if (!(error instanceof RecordFault)) throw error;
      return { ok: false, fault: `SenML record ${index}: ${error.message}` };
    }
  }
  return { ok: true, records: records.toSorted((a, b) => a.timeS - b.timeS) };
}

function resolveRecord(raw: unknown, base: Labels, nowS: number): SenmlRecord | null {
  if (typeof raw !== 'object' || raw === null || Array.isArray(raw))
    throw new RecordFault('expected an object');
  const labels = raw as Labels;
  checkLabels(labels);
  for (const label of ['bn', 'bt', 'bu', 'bv', 'bs', 'bver']) {
    if (Object.hasOwn(labels, label)) base[label] = labels[label];
  }
  checkVersion(numberOf(base, 'bver') ?? BASE_VERSION);
  const present = VALUES.filter((label) => Object.hasOwn(labels, label));
  if (present.length > 1) throw new RecordFault(`expected one value, found ${present.join(' and ')}`);
  const carriesSum = Object.hasOwn(labels, 's');
  if (present.length === 0 && !carriesSum) return baseOnly(labels);
  return {
    name: resolvedName(labels, base),
    unit: textOf(labels, 'u') ?? textOf(base, 'bu'),
    value: present.length === 0 ? null : resolvedValue(labels, base, present[0]),
    sum: carriesSum ? (numberOf(base, 'bs') ?? 0) + (numberOf(labels, 's') ?? 0) : null,
    ...resolvedTime(labels, base, nowS),
    updateS: numberOf(labels, 'ut'),
  };
}

/** A record of base fields alone yields nothing; one with a name or time but no value is a fault. */
function baseOnly(labels: Labels): null {
  for (const label of ['n', 'u', 't', 'ut']) {
    if (Object.hasOwn(labels, label)) throw new RecordFault('expected a value (v, vs, vb, vd) or a sum (s)');
  }
  return null;
}

function checkLabels(labels: Labels): void {
  for (const label of NUMBERS) {
    const value = labels[label];
    if (value !== undefined && !(typeof value === 'number' && Number.isFinite(value))) {
      throw new RecordFault(`expected a number as "${label}"`);
    }
  }
  for (const label of TEXTS) {
    if (labels[label] !== undefined && typeof labels[label] !== 'string') {
      throw new RecordFault(`expected a text as "${label}"`);
    }
  }
  if (labels['vb'] !== undefined && typeof labels['vb'] !== 'boolean') {
    throw new RecordFault('expected true or false as "vb"');
  }
  const mustKnow = Object.keys(labels).find((label) => label.endsWith('_'));
  if (mustKnow !== undefined) throw new RecordFault(`label "${mustKnow}" must be understood and is not`);
}

function checkVersion(version: number): void {
  if (version > BASE_VERSION && version !== SECONDARY_UNITS_VERSION) {
    throw new RecordFault(`version ${version} is newer than ${BASE_VERSION} and is not understood`);
  }
}

function resolvedName(labels: Labels, base: Labels): string {
  const name = (textOf(base, 'bn') ?? '') + (textOf(labels, 'n') ?? '');
  if (!NAME.test(name)) throw new RecordFault(`"${name.slice(0, 60)}" is no SenML name`);
  return name;
}

function resolvedValue(
  labels: Labels,
  base: Labels,
  label: (typeof VALUES)[number],
): number | string | boolean {
  const value = labels[label] as number | string | boolean;
  return typeof value === 'number' ? value + (numberOf(base, 'bv') ?? 0) : value;
}

/** The sum decides between relative and absolute; two parts on one side of 2^28 must not sum to the other. */
function resolvedTime(labels: Labels, base: Labels, nowS: number): { timeS: number; ownTime: boolean } {
  const parts = [numberOf(base, 'bt') ?? 0, numberOf(labels, 't') ?? 0];
  const sumS = parts[0] + parts[1];
  const ownTime = sumS >= ABSOLUTE_FROM_S;
  if (ownTime !== parts.some((part) => part >= ABSOLUTE_FROM_S)) {
    throw new RecordFault('base time and time add up across the border of relative and absolute times');
  }
  return { timeS: ownTime ? sumS : nowS + sumS, ownTime };
}

function numberOf(labels: Labels, label: string): number | null {
  return typeof labels[label] === 'number' ? labels[label] : null;
}

function textOf(labels: Labels, label: string): string | null {
  return typeof labels[label] === 'string' ? labels[label] : null;
}

/** SenML's `%` is a deprecated ratio (1 = all) and `/100` its percentage; elsewhere `%` is the percentage itself. */
export function senmlUnit(unit: string): string {
  if (unit === '%') return 'ratio';
  return unit === '/100' ? '%' : unit;
}
