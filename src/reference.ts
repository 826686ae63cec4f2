/** The written reference of the site file, and its options schema: both generated from the one declaration. */
import { siteSchema } from './config.ts';
import { POINTS, type PointSpec } from './points.ts';
import { sectionOf, type Accepts, type Key, type Section } from './schema.ts';

const WIDTH = 108;

/** `reference.yaml`: every key, commented out, with type, unit, range, default and its sentence. */
export function referenceYaml(): string {
  const section = requireSection(siteSchema);
  return [
    '# Every key of a rimehold site file. Generated from the schema: run `npm run reference`, do not edit.',
    '# A key shown with a value has that default; "required" must be given; "optional" may be left out.',
    '# Physical values are written with a unit, durations as ISO 8601 (PT10M is ten minutes).',
    '',
    ...sectionLines(section, ''),
    '',
  ].join('\n');
}

function requireSection(type: Parameters<typeof sectionOf>[0]): Section {
  const section = sectionOf(type);
  if (!section) throw new TypeError('the site schema is no section');
  return section;
}

function sectionLines(section: Section, indent: string): string[] {
  return Object.values(section.keys).flatMap((entry) => keyLines(entry, indent));
}

function keyLines(entry: Key<unknown>, indent: string): string[] {
  const sentence = wrapped(`${entry.sentence} ${standing(entry)}`, `${indent}# `);
  if (entry.key === 'points') return ['', ...sentence, `${indent}# points:`, ...pointLines(entry, indent)];
  if (!entry.section)
    return [...sentence, `${indent}# ${entry.key}: ${entry.default ?? example(entry.accepts)}`];
  const list = entry.accepts.kind.startsWith('list') ? '  # (a list: each entry begins with "- ")' : '';
  const gap = indent === '' ? [''] : [];
  return [
    ...gap,
    ...sentence,
    `${indent}# ${entry.key}:${list}`,
    ...sectionLines(entry.section, `${indent}  `),
  ];
}

function pointLines(entry: Key<unknown>, indent: string): string[] {
  const names = Object.entries(POINTS).flatMap(([name, spec]: [string, PointSpec]) => {
    const rooms = spec.perRoom ? ` One for each room: ${name}/loft.` : '';
    const must = spec.required ? ' Required.' : '';
    return wrapped(
      `${name} (${spec.unit}, plausible ${spec.plausible[0]} to ${spec.plausible[1]}): ${spec.what}.${rooms}${must}`,
      `${indent}  # `,
    );
  });
  return [
    ...names,
    `${indent}  # leaving-water:`,
    ...(entry.section ? sectionLines(entry.section, `${indent}    `) : []),
  ];
}

function standing(entry: Key<unknown>): string {
  const state = entry.default !== null ? '' : entry.optional ? ' Optional.' : ' Required.';
  return `[${accepted(entry.accepts)}]${state}`;
}

function accepted(accepts: Accepts): string {
  const { kind, oneOf, units, least, most } = accepts;
  const range = least !== undefined && most !== undefined ? `, ${least} to ${most}` : '';
  if (oneOf) return `${kind}: ${oneOf.join(', ')}`;
  return `${kind}${range}${units && units.length > 0 ? `; units ${units.join(', ')}` : ''}`;
}

function example(accepts: Accepts): string {
  return accepts.least ?? accepts.oneOf?.[0] ?? '…';
}

function wrapped(text: string, prefix: string): string[] {
  const lines: string[] = [];
  let line = '';
  for (const word of text.split(' ')) {
    if (line !== '' && prefix.length + line.length + word.length >= WIDTH) {
      lines.push(prefix + line);
      line = '';
    }
    line += line === '' ? word : ` ${word}`;
  }
  return [...lines, prefix + line];
}

/** JSON Schema 2020-12 of the site file, for editors and hosts that show options. */
export function optionsSchema(): Record<string, unknown> {
  return {
    $schema: 'https://json-schema.org/draft/2020-12/schema',
    title: 'rimehold site file',
    ...objectSchema(requireSection(siteSchema)),
  };
}

function objectSchema(section: Section): Record<string, unknown> {
  const entries = Object.values(section.keys);
  return {
    type: 'object',
    description: section.sentence,
    additionalProperties: false,
    required: entries.filter((entry) => entry.default === null && !entry.optional).map((entry) => entry.key),
    properties: Object.fromEntries(entries.map((entry) => [entry.key, keySchema(entry)])),
  };
}

function keySchema(entry: Key<unknown>): Record<string, unknown> {
  const about = { description: entry.sentence };
  const fallback = entry.default === null ? {} : { default: JSON.parse(entry.default) as unknown };
  if (entry.key === 'points' && entry.section) {
    return { ...about, type: 'object', additionalProperties: objectSchema(entry.section) };
  }
  if (entry.section && entry.accepts.kind.startsWith('list')) {
    return { ...about, ...fallback, type: 'array', items: objectSchema(entry.section) };
  }
  if (entry.section) return { ...objectSchema(entry.section), ...about, ...fallback };
  return { ...leafSchema(entry.accepts), ...about, ...fallback };
}

function leafSchema(accepts: Accepts): Record<string, unknown> {
  if (accepts.kind.startsWith('list of')) return { type: 'array' };
  if (accepts.oneOf) return { enum: [...accepts.oneOf] };
  if (accepts.kind === 'true/false') return { type: 'boolean' };
  if (accepts.kind === 'whole number')
    return { type: 'integer', minimum: Number(accepts.least), maximum: Number(accepts.most) };
  if (accepts.kind === 'number')
    return { type: 'number', minimum: Number(accepts.least), maximum: Number(accepts.most) };
  return { type: 'string' };
}
