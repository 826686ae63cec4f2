/** Measures of the strip in pixels: lanes top to bottom, scales, ticks. */
import type { Format } from './format.ts';
import type { StripData } from './strip-data.ts';

export interface Lane {
  readonly top: number;
  readonly height: number;
}

/** Each lane has 22 px above it for its name; the names' places stand in style.css. */
export const LANES = {
  price: { top: 40, height: 46 },
  temperatures: { top: 112, height: 130 },
  ice: { top: 268, height: 150 },
  runs: { top: 444, height: 34 },
} as const satisfies Record<string, Lane>;

export const PAPER_HEIGHT = 512;
export const MARGIN_WIDTH = 44;

/** Below this width the paper is longer than the window: six hours to a window. */
export const NARROW = 620;
export const WINDOWS_WHEN_NARROW = 4;

export type Scale = (value: number) => number;

export interface Geometry {
  readonly width: number;
  /** Width of what is seen at once: six hours of long paper, else all of it. */
  readonly window: number;
  readonly x: Scale;
  readonly atMs: (x: number) => number;
  readonly price: Scale;
  readonly temperature: Scale;
  readonly ice: Scale;
  readonly temperatureTicks: readonly number[];
  readonly iceTicks: readonly number[];
}

/** Maps [low, high] to a lane, high on top. */
function laneScale({ top, height }: Lane, low: number, high: number): Scale {
  return (value) => top + height - ((value - low) / (high - low)) * height;
}

/** Round numbers from `low` to `high`, about `count` of them. */
export function ticks(low: number, high: number, count: number): number[] {
  const rough = (high - low) / count;
  const power = 10 ** Math.floor(Math.log10(rough));
  const step = power * ([1, 2, 5, 10].find((factor) => factor * power >= rough) ?? 10);
  const first = Math.ceil(low / step);
  return Array.from({ length: Math.floor(high / step) - first + 1 }, (_, i) => (first + i) * step);
}

function extent(values: readonly number[], fallback: readonly [number, number]): [number, number] {
  return values.length === 0 ? [...fallback] : [Math.min(...values), Math.max(...values)];
}

/** `capacityKwh` null: the scale follows the data. Temperatures and energies are scaled in the viewer's units. */
export function geometry(
  data: StripData,
  window: number,
  capacityKwh: number | null,
  format: Format,
): Geometry {
  const length = data.endMs - data.startMs;
  const width = window < NARROW ? window * WINDOWS_WHEN_NARROW : window;
  const celsius = [...data.outdoor, ...data.room, ...data.limit, data.outdoorAhead]
    .flat()
    .map(({ value }) => value);
  const [coldC, hotC] = extent(celsius, [15, 35]);
  const low = format.temperatureNumber(Math.floor(coldC - 1));
  const high = format.temperatureNumber(Math.ceil(hotC + 1));
  const most = Math.max(
    capacityKwh ?? 1,
    ...data.iceRange.flat().map((range) => range.high),
    ...data.iceAheadRange.map((range) => range.high),
  );
  const iceHigh = format.energyNumber(most);
  const prices = [...data.price.past, ...data.price.ahead].map(({ value }) => value);
  const [cheap, dear] = extent(prices, [0, 1]);
  const temperature = laneScale(LANES.temperatures, low, high);
  const ice = laneScale(LANES.ice, 0, iceHigh);
  return {
    width,
    window,
    x: (atMs) => ((atMs - data.startMs) / length) * width,
    atMs: (x) => data.startMs + (x / width) * length,
    price: laneScale(LANES.price, Math.min(0, cheap), dear > 0 ? dear * 1.05 : 1),
    temperature: (c) => temperature(format.temperatureNumber(c)),
    ice: (kwh) => ice(format.energyNumber(kwh)),
    temperatureTicks: ticks(low, high, 5),
    iceTicks: ticks(0, iceHigh, 5),
  };
}

/** Left edge of the window that a place on the paper is seen in; the end of the paper belongs to the last one. */
export function windowOf(g: Geometry, x: number): number {
  return Math.floor(Math.min(x, g.width - 1) / g.window) * g.window;
}

/** A stretch of the paper in the pieces that are seen at once. */
export function pieces(
  g: Geometry,
  from: number,
  to: number,
): { readonly x: number; readonly width: number }[] {
  const list: { x: number; width: number }[] = [];
  for (let left = windowOf(g, from); left < to; left += g.window) {
    const x = Math.max(from, left);
    list.push({ x, width: Math.min(to, left + g.window) - x });
  }
  return list;
}

/** Full hours inside a night, by the site's clock. */
export function hours(data: StripData, format: Format): number[] {
  const list: number[] = [];
  for (let atMs = format.nextHour(data.startMs - 1); atMs <= data.endMs; atMs = format.nextHour(atMs))
    list.push(atMs);
  return list;
}
