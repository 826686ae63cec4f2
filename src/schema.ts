/**
 * How a section of the site file is declared: each key once, with its type, unit, range, default and one sentence.
 * From the same declaration come the parser, the faults, the reference and the options schema.
 */
import * as z from 'zod';
import { printable } from './errors.ts';
import { isZone, parseDuration } from './time.ts';
import { parseQuantity, unitNames, type Dimension } from './units.ts';

/** What a key accepts, in words and figures for the reference; every leaf schema carries one. */
export interface Accepts {
  readonly kind: string;
  readonly units?: readonly string[];
  readonly least?: string;
  readonly most?: string;
  readonly oneOf?: readonly string[];
}

export const acceptsOf = new WeakMap<z.ZodType, Accepts>();

export interface Key<T> {
  readonly key: string;
  readonly type: z.ZodType<T>;
  readonly sentence: string;
  readonly accepts: Accepts;
  readonly default: string | null;
  readonly optional: boolean;
  readonly section: Section | null;
}

type Keys = Readonly<Record<string, Key<unknown>>>;
export type Parsed<K extends Keys> = { readonly [N in keyof K]: K[N] extends Key<infer T> ? T : never };

/** The declaration of a section, kept beside its parser for the reference. */
export interface Section {
  readonly sentence: string;
  readonly keys: Keys;
}

const sections = new WeakMap<z.ZodType, Section>();

function describe<T>(type: z.ZodType<T>, accepts: Accepts): z.ZodType<T> {
  acceptsOf.set(type, accepts);
  return type;
}

function refuse(
  ctx: { addIssue(issue: { code: 'custom'; message: string }): void },
  expected: string,
  found: unknown,
): never {
  ctx.addIssue({ code: 'custom', message: `expected ${expected}, found ${shown(found)}` });
  return z.NEVER;
}

function shown(value: unknown): string {
  if (value === undefined) return 'nothing';
  return printable(typeof value === 'string' ? `"${value}"` : (JSON.stringify(value) ?? typeof value));
}

/** A physical value with its unit, kept inside in the dimension's own unit; refused outside its range. */
export function quantity(dimension: Dimension, least: string, most: string): z.ZodType<number> {
  const low = bound(least, dimension);
  const high = bound(most, dimension);
  const type = z.unknown().transform((text, ctx): number => {
    const parsed = parseQuantity(text, dimension);
    if (!parsed.ok) {
      return refuse(ctx, `${parsed.expected}, between ${least} and ${most}`, text);
    }
    return parsed.value >= low && parsed.value <= high
      ? parsed.value
      : refuse(ctx, `a value between ${least} and ${most}`, text);
  });
  return describe(type, { kind: dimension, units: unitNames(dimension), least, most });
}

function bound(text: string, dimension: Dimension): number {
  const parsed = parseQuantity(text, dimension);
  if (!parsed.ok) throw new TypeError(`schema bound ${text} is no ${dimension}`);
  return parsed.value;
}

/** ISO 8601 duration, kept in milliseconds. */
export function duration(least: string, most: string): z.ZodType<number> {
  const low = parseDuration(least);
  const high = parseDuration(most);
  if (low === null || high === null) throw new TypeError(`schema bounds ${least}, ${most} are no durations`);
  const type = z.unknown().transform((text, ctx): number => {
    const ms = typeof text === 'string' ? parseDuration(text) : null;
    return ms !== null && ms >= low && ms <= high
      ? ms
      : refuse(ctx, `an ISO 8601 duration such as "PT10M" between ${least} and ${most}`, text);
  });
  return describe(type, { kind: 'duration', least, most });
}

/** Money per kilowatt-hour or per something else, written as `0.21 EUR/kWh`; the currency is the site's own. */
export function money(per: string): z.ZodType<number> {
  const form = new RegExp(`^\\s*(-?\\d+(?:\\.\\d+)?)\\s*([A-Z]{3})/${per.replace(/[()]/g, '\\$&')}\\s*$`);
  const type = z.unknown().transform((text, ctx): number => {
    const match = typeof text === 'string' ? form.exec(text) : null;
    return match ? Number(match[1]) : refuse(ctx, `an amount such as "0.21 EUR/${per}"`, text);
  });
  return describe(type, { kind: 'money', units: [`EUR/${per}`, `any ISO 4217 code/${per}`] });
}

export function choice<const C extends readonly string[]>(choices: C): z.ZodType<C[number]> {
  const type = z
    .unknown()
    .transform((text, ctx): C[number] =>
      typeof text === 'string' && choices.includes(text)
        ? text
        : refuse(ctx, `one of ${choices.join(', ')}`, text),
    );
  return describe(type, { kind: 'choice', oneOf: choices });
}

export function truth(): z.ZodType<boolean> {
  const type = z
    .unknown()
    .transform((value, ctx): boolean =>
      typeof value === 'boolean' ? value : refuse(ctx, 'true or false', value),
    );
  return describe(type, { kind: 'true/false' });
}

export function whole(least: number, most: number): z.ZodType<number> {
  const type = z
    .unknown()
    .transform((value, ctx): number =>
      typeof value === 'number' && Number.isInteger(value) && value >= least && value <= most
        ? value
        : refuse(ctx, `a whole number between ${least} and ${most}`, value),
    );
  return describe(type, { kind: 'whole number', least: String(least), most: String(most) });
}

export function plainNumber(least: number, most: number): z.ZodType<number> {
  const type = z
    .unknown()
    .transform((value, ctx): number =>
      typeof value === 'number' && value >= least && value <= most
        ? value
        : refuse(ctx, `a number between ${least} and ${most}`, value),
    );
  return describe(type, { kind: 'number', least: String(least), most: String(most) });
}

export function text(pattern: RegExp, expected: string): z.ZodType<string> {
  const type = z
    .unknown()
    .transform((value, ctx): string =>
      typeof value === 'string' && pattern.test(value) ? value : refuse(ctx, expected, value),
    );
  return describe(type, { kind: expected });
}

export function zone(): z.ZodType<string> {
  const expected = 'an IANA time zone such as "Europe/Madrid"';
  const type = z
    .unknown()
    .transform((value, ctx): string =>
      typeof value === 'string' && isZone(value) ? value : refuse(ctx, expected, value),
    );
  return describe(type, { kind: expected });
}

export function listOf<T>(item: z.ZodType<T>): z.ZodType<readonly T[]> {
  const inner = acceptsOf.get(item);
  const type = z.array(item, { error: (issue) => `expected a list, found ${shown(issue.input)}` });
  const section = sections.get(item);
  if (section) sections.set(type, section);
  return describe(type, { ...inner, kind: `list of ${inner?.kind ?? 'sections'}` });
}

/** A key with a default, written the way an owner would write it. */
export function key<T>(name: string, type: z.ZodType<T>, fallback: unknown, sentence: string): Key<T> {
  return declared(
    name,
    type.prefault(fallback) as unknown as z.ZodType<T>,
    type,
    sentence,
    JSON.stringify(fallback),
    false,
  );
}

export function requiredKey<T>(name: string, type: z.ZodType<T>, sentence: string): Key<T> {
  return declared(name, type, type, sentence, null, false);
}

export function optionalKey<T>(name: string, type: z.ZodType<T>, sentence: string): Key<T | null> {
  const nullable = type.optional().transform((value) => value ?? null) as unknown as z.ZodType<T | null>;
  return declared<T | null>(name, nullable, type, sentence, null, true);
}

function declared<T>(
  name: string,
  type: z.ZodType<T>,
  inner: z.ZodType,
  sentence: string,
  fallback: string | null,
  optional: boolean,
): Key<T> {
  const section = sections.get(inner) ?? null;
  const accepts = acceptsOf.get(inner) ?? { kind: 'section' };
  return { key: name, type, sentence, accepts, default: fallback, optional, section };
}

/** A section: written keys in, our names out; a key that is not declared is a fault. */
export function section<K extends Keys>(sentence: string, keys: K): z.ZodType<Parsed<K>> {
  const shape = Object.fromEntries(Object.values(keys).map((entry) => [entry.key, entry.type]));
  const written = z.strictObject(shape, { error: (issue) => objectFault(issue) });
  const type = written.transform(
    (values) =>
      Object.fromEntries(Object.entries(keys).map(([name, entry]) => [name, values[entry.key]])) as Parsed<K>,
  );
  sections.set(type, { sentence, keys });
  return type;
}

/** A section given once for each name that the owner chooses, as the points and actuators are. */
export function sectionsBy<T>(
  item: z.ZodType<T>,
  name: z.ZodType<string>,
  sentence: string,
): z.ZodType<Readonly<Record<string, T>>> {
  const type = z.record(name as z.ZodType<string> & z.ZodType<PropertyKey, PropertyKey>, item, {
    error: (issue) => objectFault(issue),
  }) as unknown as z.ZodType<Readonly<Record<string, T>>>;
  const inner = sections.get(item);
  if (inner) sections.set(type, { sentence, keys: inner.keys });
  return describe(type, { kind: 'sections by name' });
}

function objectFault(issue: { code?: string; input?: unknown }): string | undefined {
  return issue.code === 'invalid_type'
    ? `expected a section of keys, found ${shown(issue.input)}`
    : undefined;
}

export function sectionOf(type: z.ZodType): Section | null {
  return sections.get(type) ?? null;
}
