/**
 * How rimehold describes itself: Homie convention 5.0.0 (homieiot.github.io), one root device for each site.
 * The table of nodes and properties is a contract with owners and hubs.
 */
import { COMMANDS, PHASES, STRATEGIES, TOLD, WISHES } from '../commands.ts';
import type { SiteConfig } from '../config.ts';

export type Datatype = 'integer' | 'float' | 'enum' | 'string' | 'datetime' | 'duration' | 'json';

export interface Property {
  readonly name: string;
  readonly datatype: Datatype;
  readonly format?: string;
  readonly unit?: string;
  readonly settable?: true;
  /** Numbers: decimals that are published. A change smaller than one unit of the last decimal is not. */
  readonly decimals?: number;
  /** Times: a change smaller than this is not published. */
  readonly bandMs?: number;
}

const float = (name: string, unit: string, decimals: number): Property => ({
  name,
  datatype: 'float',
  unit,
  decimals,
});
const text = (name: string): Property => ({ name, datatype: 'string' });
const time = (name: string, bandMs = 0): Property => ({ name, datatype: 'datetime', bandMs });
const json = (name: string, schema: object): Property => ({
  name,
  datatype: 'json',
  format: JSON.stringify(schema),
});
const oneOf = (name: string, choices: readonly string[]): Property => ({
  name,
  datatype: 'enum',
  format: choices.join(','),
});
const settable = (property: Property): Property => ({ ...property, settable: true });

const LASTS_BAND_MS = 5 * 60_000;

/** `MONEY` stands for the site's currency until `nodesOf` puts it there. */
const NODES = {
  bank: {
    name: 'Ice bank',
    properties: {
      'ice-on-hand': float('Ice on hand', 'kWh', 2),
      'ice-on-hand-low': float('Ice on hand, low end of the 90 % interval', 'kWh', 2),
      'ice-on-hand-high': float('Ice on hand, high end of the 90 % interval', 'kWh', 2),
      inventory: float('Ice inventory', '%', 1),
      'ice-mass': float('Ice', 'kg', 1),
      'lasts-until': time('Ice lasts until', LASTS_BAND_MS),
      phase: oneOf('Phase', PHASES),
      'heat-leak': float('Heat leak', 'W/K', 2),
      told: settable(oneOf('Told by the owner', ['nothing', ...TOLD])),
    },
  },
  plan: {
    name: 'Plan',
    properties: {
      'evening-load': float('Evening load', 'kWh', 2),
      'evening-load-high': float('Evening load, 90th percentile', 'kWh', 2),
      'next-change': time('Next change of command'),
      'worth-of-ice': float('Worth of one more kWh of ice', 'MONEY/kWh', 4),
      schedule: json('Schedule', { type: 'object' }),
      strategy: settable(oneOf('Strategy', STRATEGIES)),
    },
  },
  dispatch: {
    name: 'Dispatch',
    properties: {
      command: oneOf('Command', COMMANDS),
      reason: text('Reason'),
      expires: time('Command expires'),
      order: json('Order', { type: 'object' }),
      'held-back-by': text('Held back by'),
      wish: settable(oneOf('Wish', WISHES)),
      // Homie 5 has no format for a duration, so its name says the range
      'wish-for': settable({ name: 'Wish holds for, PT5M to PT24H', datatype: 'duration' }),
    },
  },
  comfort: {
    name: 'Comfort',
    properties: {
      limit: settable({ ...float('Comfort limit', '°C', 1), format: '18:32:0.1' }),
      'warm-hours': float('Warm hours tonight', 'K·h', 2),
      'feels-like': float('Feels like', '°C', 1),
    },
  },
  night: {
    name: 'Last night',
    properties: {
      sheet: json('Night sheet', { type: 'object' }),
      cost: float('Cost of the night', 'MONEY', 2),
      saved: float('Saved in the night', 'MONEY', 2),
    },
  },
  health: {
    name: 'Health',
    properties: {
      'points-heard': { name: 'Points heard', datatype: 'integer', decimals: 0 },
      'points-stale': text('Stale points'),
      clock: oneOf('Clock', ['set', 'doubtful']),
      'balance-residual': float('Residual of the energy balance', '%', 1),
    },
  },
} as const satisfies Record<string, { name: string; properties: Record<string, Property> }>;

type Nodes = typeof NODES;
/** `node/property`, as it stands in a topic. */
export type Path = {
  [N in keyof Nodes]: `${N}/${Extract<keyof Nodes[N]['properties'], string>}`;
}[keyof Nodes];

export interface Node {
  readonly name: string;
  readonly properties: Readonly<Record<string, Property>>;
}

export type SettablePath =
  'bank/told' | 'plan/strategy' | 'dispatch/wish' | 'dispatch/wish-for' | 'comfort/limit';

/** The nodes of a site; money in its own currency. */
export function nodesOf(config: SiteConfig): Record<string, Node> {
  const priced = (property: Property): Property =>
    property.unit === undefined
      ? property
      : { ...property, unit: property.unit.replace('MONEY', config.site.currency) };
  return Object.fromEntries(
    Object.entries(NODES).map(([id, node]) => [
      id,
      {
        name: node.name,
        properties: Object.fromEntries(Object.entries(node.properties).map(([key, of]) => [key, priced(of)])),
      },
    ]),
  );
}

/** All properties by path, in the order of the table. */
export function propertiesOf(config: SiteConfig): Map<Path, Property> {
  return new Map(
    Object.entries(nodesOf(config)).flatMap(([node, { properties }]) =>
      Object.entries(properties).map(([id, property]) => [`${node}/${id}` as Path, property] as const),
    ),
  );
}

/** The `$description` document. Its version is a digest of the rest: a new document has a new version. */
export function describeDevice(config: SiteConfig): string {
  const nodes = Object.fromEntries(
    Object.entries(nodesOf(config)).map(([id, node]) => [
      id,
      {
        name: node.name,
        properties: Object.fromEntries(
          Object.entries(node.properties).map(
            ([key, { name, datatype, format, unit, settable: isSettable }]) => [
              key,
              {
                name,
                datatype,
                ...(format === undefined ? {} : { format }),
                ...(unit === undefined ? {} : { unit }),
                ...(isSettable ? { settable: true } : {}),
              },
            ],
          ),
        ),
      },
    ]),
  );
  const document = { homie: '5.0', name: config.site.name, nodes };
  return JSON.stringify({ ...document, version: digest(JSON.stringify(document)) });
}

/** FNV-1a, 32 bit (Fowler, Noll, Vo; offset basis and prime after RFC 9923). */
function digest(of: string): number {
  let hash = 0x811c9dc5;
  for (const byte of new TextEncoder().encode(of)) hash = Math.imul(hash ^ byte, 0x01000193) >>> 0;
  return hash;
}

/** Topic of the root device: `homie/5/juniper`. */
export function deviceTopic(config: SiteConfig): string {
  return `${config.announce.domain}/5/${config.site.id}`;
}

/** What the broker publishes when the daemon dies. */
export function willOf(config: SiteConfig): { topic: string; payload: string } {
  return { topic: `${deviceTopic(config)}/$state`, payload: 'lost' };
}
