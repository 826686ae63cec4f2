/**
 * Reads a site file: YAML text in, configuration or every fault at once out. A fault says where, what was expected,
 * what was found, and the nearest key that exists. Pure: reading the file from disk is the caller's work.
 */
import { closest, distance } from 'fastest-levenshtein';
import type * as z from 'zod';
import { LineCounter, parseDocument, type Document } from 'yaml';
import { siteSchema, type SiteConfig } from './config.ts';
import { cronFault } from './cron-line.ts';
import { POINTS, pointSpec } from './points.ts';
import { sectionOf, type Section } from './schema.ts';
import { toInside, unitNames, type Dimension } from './units.ts';

export interface Fault {
  /** Keys from the top of the file, `/` between; empty for the file itself. */
  readonly path: string;
  readonly sentence: string;
}

export type SiteFile = { ok: true; config: SiteConfig } | { ok: false; faults: readonly Fault[] };

export function parseSiteFile(text: string): SiteFile {
  const lines = new LineCounter();
  const document = parseDocument(text, { lineCounter: lines, prettyErrors: true });
  // The first one only: a wrong indent makes a dozen more that are none.
  const broken = document.errors.at(0);
  if (broken) {
    const sentence = `not readable as YAML: ${broken.message.split('\n')[0].replace(/:$/, '')}`;
    return { ok: false, faults: [{ path: '', sentence }] };
  }
  const written = plainValue(document);
  if (written === TOO_MUCH)
    return {
      ok: false,
      faults: [{ path: '', sentence: 'expected a plain file, found aliases that unfold without end' }],
    };
  const hidden = hiddenKeys(written, []);
  if (hidden.length > 0) return { ok: false, faults: hidden };
  const parsed = siteSchema.safeParse(written ?? {});
  if (!parsed.success) return { ok: false, faults: parsed.error.issues.flatMap((issue) => faultsOf(issue)) };
  const faults = crossFaults(parsed.data);
  return faults.length > 0 ? { ok: false, faults } : { ok: true, config: parsed.data };
}

const TOO_MUCH = Symbol('too much');

/** What the file says, or `TOO_MUCH` when its aliases would unfold to more than a file can mean. */
function plainValue(document: Document): unknown {
  try {
    return document.toJS();
  } catch {
    return TOO_MUCH;
  }
}

/** Keys that a record would swallow without a word: they name what every object has of itself. */
function hiddenKeys(value: unknown, path: readonly string[]): Fault[] {
  if (typeof value !== 'object' || value === null) return [];
  return Object.entries(value).flatMap(([name, inner]) => {
    const at = [...path, name];
    const own = name === '__proto__' ? [{ path: at.join('/'), sentence: 'unknown key' }] : [];
    return [...own, ...hiddenKeys(inner, at)];
  });
}

function faultsOf(issue: z.core.$ZodIssue): Fault[] {
  const path = issue.path.map(String);
  if (issue.code === 'unrecognized_keys') {
    return issue.keys.map((unknown) => ({
      path: [...path, unknown].join('/'),
      sentence: `unknown key${nearest(unknown, keysAt(path))}`,
    }));
  }
  if (issue.code === 'invalid_key') {
    const name = path.at(-1) ?? '';
    return [{ path: path.join('/'), sentence: `unknown point${nearest(name, Object.keys(POINTS))}` }];
  }
  return [{ path: path.join('/'), sentence: issue.message }];
}

/** The keys that a section at this path takes. */
function keysAt(path: readonly string[]): string[] {
  let section: Section | null = sectionOf(siteSchema);
  for (const step of path) {
    const entry = section && Object.values(section.keys).find((candidate) => candidate.key === step);
    if (entry) section = entry.section;
  }
  return section ? Object.values(section.keys).map((entry) => entry.key) : [];
}

function nearest(word: string, known: readonly string[]): string {
  if (known.length === 0) return '';
  const best = closest(word, known);
  return distance(word, best) <= Math.max(3, word.length / 2)
    ? `, the nearest that exists is "${best}"`
    : `, expected one of ${known.join(', ')}`;
}

/** Faults that only show when several keys are seen together. */
function crossFaults(config: SiteConfig): Fault[] {
  return [
    ...pointFaults(config),
    ...bankFaults(config),
    ...powerFaults(config),
    ...seasonFaults(config),
    ...timetableFaults(config),
    ...actuatorFaults(config),
    ...brokerFaults(config),
    ...secretFaults(config),
  ];
}

function pointFaults(config: SiteConfig): Fault[] {
  const missing = Object.entries(POINTS).flatMap(([name, spec]) =>
    'required' in spec && !(name in config.points)
      ? [
          {
            path: `points/${name}`,
            sentence: `expected this point (${spec.what}), found nothing; the estimate cannot do without it`,
          },
        ]
      : [],
  );
  const units = Object.entries(config.points).flatMap(([id, point]) => {
    const spec = pointSpec(id);
    if (!spec || point.unit === null || spec.kind === 'boolean' || spec.kind === 'series') return [];
    const dimension: Dimension = spec.kind;
    return toInside(0, point.unit, dimension) === null
      ? [
          {
            path: `points/${id}/unit`,
            sentence: `expected one of ${unitNames(dimension).join(', ')}, found "${point.unit}"`,
          },
        ]
      : [];
  });
  const offsets = Object.entries(config.points).flatMap(([id, point]) =>
    point.offsetK !== 0 && pointSpec(id)?.kind !== 'temperature'
      ? [{ path: `points/${id}/offset`, sentence: 'expected no offset here: only thermometers take one' }]
      : [],
  );
  return [...missing, ...units, ...offsets];
}

function bankFaults({ bank }: SiteConfig): Fault[] {
  const faults: Fault[] = [];
  if (bank.mostIceKg > bank.waterL) {
    faults.push({
      path: 'bank/most-ice',
      sentence: `expected no more ice than the ${bank.waterL} kg of water in the bank, found ${bank.mostIceKg} kg`,
    });
  }
  if (bank.electrodeIceKg !== null && bank.electrodeIceKg > bank.waterL) {
    faults.push({
      path: 'bank/electrode-ice',
      sentence: `expected no more than the ${bank.waterL} kg of water, found ${bank.electrodeIceKg} kg`,
    });
  }
  return faults;
}

function powerFaults({ power }: SiteConfig): Fault[] {
  return (power.tariff === null) === (power.island === null)
    ? [
        {
          path: 'power',
          sentence: `expected either "tariff" or "island", found ${power.tariff === null ? 'neither' : 'both'}`,
        },
      ]
    : [];
}

function seasonFaults({ power }: SiteConfig): Fault[] {
  return (power.tariff?.periods ?? []).flatMap(({ season }, i) =>
    season === null || season.length === 2
      ? []
      : [
          {
            path: `power/tariff/periods/${i}/season`,
            sentence: `expected two days, the first and the last of the season, such as ["06-01", "09-30"], found ${JSON.stringify(season)}`,
          },
        ],
  );
}

function timetableFaults({ planning }: SiteConfig): Fault[] {
  return planning.timetable.flatMap(({ at }, i) => {
    const sentence = cronFault(at);
    return sentence === null ? [] : [{ path: `planning/timetable/${i}/at`, sentence }];
  });
}

function actuatorFaults({ actuators, points }: SiteConfig): Fault[] {
  return Object.entries(actuators).flatMap(([machine, actuator]) =>
    actuator?.confirmBy && !(actuator.confirmBy in points)
      ? [
          {
            path: `actuators/${machine}/confirm-by`,
            sentence: `expected a point of this file, found "${actuator.confirmBy}", which is not under points`,
          },
        ]
      : [],
  );
}

function brokerFaults({ broker }: SiteConfig): Fault[] {
  if (URL.canParse(broker.url)) return [];
  const shown = broker.url.replace(/\/\/.*@/, '//…@');
  const expected = 'expected an address such as "mqtt://192.168.1.5:1883", with a port up to 65535';
  return [{ path: 'broker/url', sentence: `${expected}, found "${shown}"` }];
}

function secretFaults({ broker, web }: SiteConfig): Fault[] {
  const faults: Fault[] = [];
  if (broker.passwordFile !== null && broker.passwordEnv !== null) {
    faults.push({
      path: 'broker/password-env',
      sentence: 'expected one source of the password, found password-file and password-env',
    });
  }
  if (web.passphraseFile !== null && web.passphraseEnv !== null) {
    faults.push({
      path: 'web/passphrase-env',
      sentence: 'expected one source of the passphrase, found passphrase-file and passphrase-env',
    });
  }
  return faults;
}

/** All faults as lines for a terminal, the file's name in front of each. */
export function faultLines(fileName: string, faults: readonly Fault[]): string {
  const head = `${fileName}: ${faults.length} ${faults.length === 1 ? 'fault' : 'faults'}; nothing was started.`;
  return [head, ...faults.map((fault) => `  ${fault.path || '(file)'}: ${fault.sentence}.`)].join('\n');
}
