/**
 * Announcements in the owner's own words, for hubs with a discovery form of their own: each template of the site file
 * is rendered once for each property of the device and published retained. Pure.
 *
 * In a payload, placeholders of text are escaped for the inside of a JSON string ("…{{name}}…"); `choices`, `least`,
 * `most`, `step` and `settable` are whole JSON values and stand without quotes.
 */
import { RimeholdError } from '../errors.ts';
import type { SiteConfig } from '../config.ts';
import { deviceTopic, propertiesOf, type Property } from './homie.ts';
import type { Publication } from './link.ts';

type Template = SiteConfig['announce']['templates'][number];

interface Subject {
  readonly config: SiteConfig;
  readonly path: string;
  readonly property: Property;
}

/** Texts: usable in topics, and inside quotes in payloads. */
const TEXTS: Readonly<Record<string, (of: Subject) => string>> = {
  'site-id': ({ config }) => config.site.id,
  'site-name': ({ config }) => config.site.name,
  node: ({ path }) => path.split('/')[0],
  property: ({ path }) => path.split('/')[1],
  name: ({ property }) => property.name,
  topic: ({ config, path }) => `${deviceTopic(config)}/${path}`,
  'set-topic': ({ config, path }) => `${deviceTopic(config)}/${path}/set`,
  'state-topic': ({ config }) => `${deviceTopic(config)}/$state`,
  datatype: ({ property }) => property.datatype,
  unit: ({ property }) => property.unit ?? '',
  format: ({ property }) => property.format ?? '',
};

/** Whole JSON values: usable in payloads without quotes. */
const VALUES: Readonly<Record<string, (of: Subject) => unknown>> = {
  choices: ({ property }) => (property.datatype === 'enum' ? (property.format?.split(',') ?? []) : []),
  least: ({ property }) => range(property)[0],
  most: ({ property }) => range(property)[1],
  step: ({ property }) => range(property)[2],
  settable: ({ property }) => property.settable === true,
};

export const PLACEHOLDERS: readonly string[] = [...Object.keys(TEXTS), ...Object.keys(VALUES)];

const PLACEHOLDER = /\{\{\s*([^{}]*?)\s*\}\}/g;

function range(property: Property): (number | null)[] {
  const isNumber = property.datatype === 'float' || property.datatype === 'integer';
  const parts = isNumber ? (property.format ?? '').split(':') : [];
  return [0, 1, 2].map((index) => (parts[index] ? Number(parts[index]) : null));
}

/** All announcements of a site. Throws `config` with every fault when a template cannot be rendered. */
export function announcements(config: SiteConfig): Publication[] {
  const faults = templateFaults(config);
  if (faults.length > 0) throw new RimeholdError('config', faults.join(' '), { faults });
  return config.announce.templates.flatMap((template) =>
    subjects(config).map((subject) => ({
      topic: render(template.topic, subject, (text) => text),
      payload: render(template.payload, subject, escaped),
      qos: 1 as const,
      retain: true,
    })),
  );
}

/** What is wrong with the templates of a site file, one sentence each. */
export function templateFaults(config: SiteConfig): string[] {
  return config.announce.templates.flatMap((template, index) => {
    const where = `announce.templates.${index}`;
    const unknown = [
      ...unknownIn(where, 'topic', template.topic),
      ...unknownIn(where, 'payload', template.payload),
    ];
    return unknown.length > 0 ? unknown : renderFaults(where, template, config);
  });
}

function unknownIn(where: string, key: string, text: string): string[] {
  const usable = key === 'topic' ? Object.keys(TEXTS) : PLACEHOLDERS;
  return [...text.matchAll(PLACEHOLDER)]
    .filter(([, name]) => !usable.includes(name))
    .map(
      ([, name]) =>
        `${where}.${key}: expected one of the placeholders ${usable.join(', ')}, found "{{${name}}}".`,
    );
}

/** Renders it for every property: topics must be topics and differ, payloads that begin as JSON must be JSON. */
function renderFaults(where: string, template: Template, config: SiteConfig): string[] {
  const topics = new Set<string>();
  for (const subject of subjects(config)) {
    const topic = render(template.topic, subject, (text) => text);
    if (/[+#\0]/.test(topic)) return [`${where}.topic: expected a topic without + or #, found "${topic}".`];
    if (topics.has(topic)) {
      return [
        `${where}.topic: expected a topic of its own for each property, found "${topic}" twice; use {{node}} and {{property}}.`,
      ];
    }
    topics.add(topic);
    const payload = render(template.payload, subject, escaped);
    if (/^\s*[{[]/.test(payload) && !isJson(payload)) {
      return [`${where}.payload: expected JSON, found ${payload.slice(0, 80)}`];
    }
  }
  return [];
}

function isJson(text: string): boolean {
  try {
    JSON.parse(text);
    return true;
  } catch {
    return false;
  }
}

function subjects(config: SiteConfig): Subject[] {
  return [...propertiesOf(config)].map(([path, property]) => ({ config, path, property }));
}

const escaped = (text: string): string => JSON.stringify(text).slice(1, -1);

function render(text: string, subject: Subject, escape: (text: string) => string): string {
  return text.replace(PLACEHOLDER, (whole, name: string) => {
    if (Object.hasOwn(TEXTS, name)) return escape(TEXTS[name](subject));
    return Object.hasOwn(VALUES, name) ? JSON.stringify(VALUES[name](subject)) : whole;
  });
}
