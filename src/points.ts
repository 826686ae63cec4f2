/**
 * The points that a plant may offer, and what it means to have heard one.
 * Public names, units and plausible ranges are a contract with owners; Brick classes after Brick 1.4.4.
 */
import type { Dimension } from './units.ts';

export type PointKind = Dimension | 'boolean' | 'series';

export interface PointSpec {
  readonly kind: PointKind;
  /** Unit that values are kept and published in. */
  readonly unit: string;
  readonly plausible: readonly [low: number, high: number];
  readonly brickClass: string | null;
  readonly what: string;
  /** One point for each room, written `room-temperature/loft`; the bare name is the main room. */
  readonly perRoom?: true;
  readonly required?: true;
}

const temperature = (low: number, high: number, brickClass: string | null, what: string): PointSpec => ({
  kind: 'temperature',
  unit: 'degC',
  plausible: [low, high],
  brickClass,
  what,
});
/** A meter at rest may show a little less than nothing: the lower limits leave room for it. */
const power = (low: number, high: number, what: string): PointSpec => ({
  kind: 'power',
  unit: 'W',
  plausible: [low, high],
  brickClass: 'Electric_Power_Sensor',
  what,
});
const truth = (brickClass: string | null, what: string): PointSpec => ({
  kind: 'boolean',
  unit: 'true/false',
  plausible: [0, 1],
  brickClass,
  what,
});
const percent = (brickClass: string | null, what: string): PointSpec => ({
  kind: 'fraction',
  unit: '%',
  plausible: [0, 100],
  brickClass,
  what,
});

export const POINTS = {
  'leaving-water': {
    ...temperature(
      -8,
      45,
      'Ice_Tank_Leaving_Water_Temperature_Sensor',
      'melt water leaving the bank towards the load',
    ),
    required: true,
  },
  'entering-water': temperature(
    -8,
    60,
    'Entering_Chilled_Water_Temperature_Sensor',
    'water coming back from the load',
  ),
  'bank-top': temperature(-8, 45, 'Water_Temperature_Sensor', 'water in the upper third of the bank'),
  'bank-middle': temperature(-8, 45, 'Water_Temperature_Sensor', 'water at half height of the bank'),
  'bank-bottom': temperature(-8, 45, 'Water_Temperature_Sensor', 'water in the lower third of the bank'),
  'bank-level': {
    kind: 'level',
    unit: 'mm',
    plausible: [0, 3000],
    brickClass: 'Water_Level_Sensor',
    what: 'water level in the bank',
  },
  'bank-surround': temperature(-40, 60, 'Air_Temperature_Sensor', 'air round the bank'),
  'coolant-supply': temperature(
    -40,
    45,
    'Leaving_Chilled_Water_Temperature_Sensor',
    "coolant to the bank's coil, or freezer air",
  ),
  'coolant-return': temperature(
    -40,
    45,
    'Entering_Chilled_Water_Temperature_Sensor',
    "coolant back from the bank's coil",
  ),
  'loop-flow': {
    kind: 'waterFlow',
    unit: 'L/min',
    // A meter at rest may show a little less than nothing.
    plausible: [-5, 200],
    brickClass: 'Chilled_Water_Flow_Sensor',
    what: 'melt-water flow through the load loop',
  },
  'chiller-power': { ...power(-10, 20_000, 'electrical power of the ice machine'), required: true },
  'pump-power': power(-10, 5000, 'electrical power of the melt-water pump'),
  'fan-power': power(-10, 5000, 'electrical power of the fan coil'),
  'room-temperature': {
    ...temperature(-30, 60, 'Zone_Air_Temperature_Sensor', 'air in a cooled room'),
    perRoom: true,
    required: true,
  },
  'room-humidity': {
    ...percent('Zone_Air_Humidity_Sensor', 'relative humidity in a cooled room'),
    perRoom: true,
  },
  'outdoor-temperature': {
    ...temperature(-50, 60, 'Outside_Air_Temperature_Sensor', 'outdoor air in the shade'),
    required: true,
  },
  'outdoor-humidity': percent('Outside_Air_Humidity_Sensor', 'outdoor relative humidity'),
  'panel-power': power(-10, 50_000, 'power from the solar panels'),
  'battery-charge': percent(null, 'charge of the site battery'),
  'generator-power': power(-10, 50_000, 'power from the generator'),
  'house-power': power(-10, 50_000, 'power that the house draws, the cooling plant left out'),
  'grid-power': power(-50_000, 50_000, 'power from the grid, feed-in negative'),
  'ice-at-electrode': truth(null, 'thickness electrode is iced'),
  occupied: truth('Occupancy_Sensor', 'somebody is home'),
  'drip-tray-wet': truth('Leak_Sensor', 'water in the drip tray'),
  'high-pressure-trip': truth('Alarm', "the ice machine's high-pressure cut-out has tripped"),
  'outdoor-forecast': {
    kind: 'series',
    unit: 'degC',
    plausible: [-50, 60],
    brickClass: null,
    what: 'forecast of the outdoor temperature: JSON array of {time, temperature}',
  },
  prices: {
    kind: 'series',
    unit: 'money/kWh',
    plausible: [-100, 100],
    brickClass: null,
    what: 'dated prices of electricity',
  },
} as const satisfies Record<string, PointSpec>;

export type PointName = keyof typeof POINTS;
/** A point, or one of several rooms' points: `room-temperature/loft`. */
export type PointId = PointName | `${'room-temperature' | 'room-humidity'}/${string}`;

const ROOM_NAME = /^[a-z0-9]([a-z0-9-]*[a-z0-9])?$/;

/** The specification behind a point id; null when no such point exists. */
export function pointSpec(id: string): PointSpec | null {
  const [name, room, ...rest] = id.split('/');
  if (!Object.hasOwn(POINTS, name)) return null;
  const spec: PointSpec = POINTS[name as PointName];
  if (room === undefined) return spec;
  return spec.perRoom && rest.length === 0 && ROOM_NAME.test(room) ? spec : null;
}

export function isPointId(id: string): id is PointId {
  return pointSpec(id) !== null;
}

/** One measured value in the point's own unit. Truth values are 0 or 1. `atMs` is when it was measured. */
export interface Reading {
  readonly point: PointId;
  readonly atMs: number;
  readonly value: number;
}

/** Why a number that came for a point is not used. */
export type Unusable = 'one-wire-power-on-85' | 'one-wire-cut' | 'implausible' | 'not-a-number';

/**
 * Judges a number for a point. One-wire thermometers answer exactly 85.0 after a brown-out and −127 when cut
 * (common practice, no source); both are named. All else outside the plausible range is quarantined.
 */
export function judge(spec: PointSpec, value: number): Unusable | null {
  if (!Number.isFinite(value)) return 'not-a-number';
  if (spec.kind === 'temperature' && value === 85) return 'one-wire-power-on-85';
  if (spec.kind === 'temperature' && value === -127) return 'one-wire-cut';
  return value >= spec.plausible[0] && value <= spec.plausible[1] ? null : 'implausible';
}

/** What is known of a point now. Absence is typed; the last value stays visible beside the reason. */
export type LivePoint =
  | { readonly value: number; readonly atMs: number }
  | {
      readonly value: null;
      readonly reason: 'not-configured' | 'never-heard' | 'stale';
      readonly last: Reading | null;
    };

/** Live points by id; a point that is not configured may be missing altogether. */
export type LivePoints = Readonly<Partial<Record<PointId, LivePoint>>>;

/** The fresh value of a point, or null. */
export function valueOf(live: LivePoints, id: PointId): number | null {
  return live[id]?.value ?? null;
}

/** Mean of the fresh values of a per-room point over all rooms, or null when none is fresh. */
export function meanOverRooms(live: LivePoints, name: 'room-temperature' | 'room-humidity'): number | null {
  const values = Object.entries(live).flatMap(([id, point]) =>
    (id === name || id.startsWith(`${name}/`)) && point?.value != null ? [point.value] : [],
  );
  return values.length === 0 ? null : values.reduce((sum, value) => sum + value, 0) / values.length;
}
