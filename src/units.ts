/**
 * Physical dimensions, the unit each is kept in inside, and every unit that a site file or a payload may name.
 * Conversion happens here and only at the edges. A scale is `inside = value * factor + shift`.
 *
 * Factors: exact by definition unless marked. BTU is the International Table BTU (ISO 31-4), 1055.05585262 J;
 * the ton of refrigeration is 12,000 BTU/h (common practice, no source). SenML unit names: RFC 8428, RFC 8798.
 */
type Scale = readonly [factor: number, shift: number];

const BTU_J = 1055.05585262;
const linear = (factor: number): Scale => [factor, 0];

export const DIMENSIONS = {
  temperature: {
    inside: 'degC',
    units: {
      degC: [1, 0],
      '°C': [1, 0],
      Cel: [1, 0],
      C: [1, 0],
      degF: [5 / 9, -160 / 9],
      '°F': [5 / 9, -160 / 9],
      F: [5 / 9, -160 / 9],
      K: [1, -273.15],
    },
  },
  temperatureDifference: { inside: 'K', units: { K: linear(1), degF: linear(5 / 9), '°F': linear(5 / 9) } },
  volume: { inside: 'L', units: { L: linear(1), l: linear(1), m3: linear(1000), gal: linear(3.785411784) } },
  mass: { inside: 'kg', units: { kg: linear(1), g: linear(1e-3), lb: linear(0.45359237) } },
  power: {
    inside: 'W',
    units: {
      W: linear(1),
      kW: linear(1e3),
      'BTU/h': linear(BTU_J / 3600),
      ton: linear((12_000 * BTU_J) / 3600),
    },
  },
  energy: {
    inside: 'kWh',
    units: {
      kWh: linear(1),
      Wh: linear(1e-3),
      MJ: linear(1 / 3.6),
      J: linear(1 / 3.6e6),
      BTU: linear(BTU_J / 3.6e6),
    },
  },
  conductance: { inside: 'W/K', units: { 'W/K': linear(1), 'BTU/(h degF)': linear((BTU_J / 3600) * 1.8) } },
  heatCapacity: {
    inside: 'kWh/K',
    units: { 'kWh/K': linear(1), 'MJ/K': linear(1 / 3.6), 'BTU/degF': linear((BTU_J / 3.6e6) * 1.8) },
  },
  waterFlow: {
    inside: 'L/min',
    units: {
      'L/min': linear(1),
      'l/min': linear(1),
      'L/s': linear(60),
      'l/s': linear(60),
      'L/h': linear(1 / 60),
      'm3/h': linear(1000 / 60),
      'm3/s': linear(60_000),
      'kg/s': linear(60),
      'gal/min': linear(3.785411784),
    },
  },
  airFlow: {
    inside: 'm3/h',
    units: { 'm3/h': linear(1), 'm3/s': linear(3600), 'L/s': linear(3.6), 'ft3/min': linear(1.69901082) },
  },
  length: {
    inside: 'm',
    units: { m: linear(1), mm: linear(1e-3), cm: linear(1e-2), ft: linear(0.3048), in: linear(0.0254) },
  },
  level: {
    inside: 'mm',
    units: { mm: linear(1), cm: linear(10), m: linear(1000), in: linear(25.4) },
  },
  area: { inside: 'm2', units: { m2: linear(1), ft2: linear(0.09290304) } },
  angle: { inside: 'deg', units: { deg: linear(1) } },
  fraction: {
    inside: '%',
    units: { '%': linear(1), '%RH': linear(1), '/': linear(100), ratio: linear(100) },
  },
  price: { inside: 'money/kWh', units: {} },
} as const satisfies Record<string, { inside: string; units: Record<string, Scale> }>;

export type Dimension = keyof typeof DIMENSIONS;

/** Every unit name of a dimension, for messages and the generated reference. */
export function unitNames(dimension: Dimension): string[] {
  return Object.keys(DIMENSIONS[dimension].units);
}

/** Converts a number in a named unit to the inside unit of its dimension; null when the unit does not belong to it. */
export function toInside(value: number, unit: string, dimension: Dimension): number | null {
  const units: Record<string, Scale> = DIMENSIONS[dimension].units;
  if (!Object.hasOwn(units, unit)) return null;
  const [factor, shift] = units[unit];
  return value * factor + shift;
}

/** Converts from the inside unit to a named unit; null when the unit does not belong to the dimension. */
export function fromInside(value: number, unit: string, dimension: Dimension): number | null {
  const units: Record<string, Scale> = DIMENSIONS[dimension].units;
  if (!Object.hasOwn(units, unit)) return null;
  const [factor, shift] = units[unit];
  return (value - shift) / factor;
}

const QUANTITY = /^\s*([-+]?(?:\d+\.?\d*|\.\d+)(?:[eE][-+]?\d+)?)\s*(\S.*?)?\s*$/;

export type ParsedQuantity = { ok: true; value: number } | { ok: false; expected: string; found: string };

/** Reads "240 L" into the inside unit of its dimension. Any other thing is refused with what was expected. */
export function parseQuantity(text: unknown, dimension: Dimension): ParsedQuantity {
  const expected = `a number with one of the units ${unitNames(dimension).join(', ')}`;
  const found = typeof text === 'string' ? `"${text}"` : (JSON.stringify(text) ?? 'nothing');
  if (typeof text !== 'string') return { ok: false, expected, found };
  const match = QUANTITY.exec(text);
  if (!match?.[2]) return { ok: false, expected, found };
  const value = toInside(Number(match[1]), match[2], dimension);
  return value === null || !Number.isFinite(value) ? { ok: false, expected, found } : { ok: true, value };
}

/** How a site shows figures: SI, or the inch-pound units of the trade. */
export type DisplayUnits = 'SI' | 'IP';

/** What each inside unit is, and how it reads in SI and IP: unit and decimals. */
const SHOWN: Readonly<
  Record<string, { dimension: Dimension; SI: string; IP: string; digits: readonly [SI: number, IP: number] }>
> = {
  degC: { dimension: 'temperature', SI: '°C', IP: '°F', digits: [1, 1] },
  W: { dimension: 'power', SI: 'W', IP: 'W', digits: [0, 0] },
  'L/min': { dimension: 'waterFlow', SI: 'L/min', IP: 'gal/min', digits: [1, 2] },
  mm: { dimension: 'level', SI: 'mm', IP: 'in', digits: [0, 1] },
  kg: { dimension: 'mass', SI: 'kg', IP: 'lb', digits: [1, 0] },
  '%': { dimension: 'fraction', SI: '%', IP: '%', digits: [0, 0] },
  K: { dimension: 'temperatureDifference', SI: 'K', IP: '°F', digits: [2, 2] },
  'W/K': { dimension: 'conductance', SI: 'W/K', IP: 'BTU/(h degF)', digits: [1, 1] },
};

/** A value in an inside unit as a site shows it; electricity stays in W. An unknown unit is left as it is. */
export function shownIn(
  value: number,
  unit: string,
  units: DisplayUnits,
): { readonly value: number; readonly unit: string; readonly digits: number } {
  if (!Object.hasOwn(SHOWN, unit)) return { value, unit, digits: Math.abs(value) < 10 ? 2 : 0 };
  const known = SHOWN[unit];
  const shown = fromInside(value, known[units], known.dimension) ?? value;
  return {
    value: shown,
    unit: known[units].replace('degF', '°F'),
    digits: known.digits[units === 'SI' ? 0 : 1],
  };
}
