/**
 * The three small plots of a printed sheet, drawn by hand as SVG: price stepped with its figures written in, outdoor and room with the
 * limit, ice on hand with its interval over bands of what ran. One axis, noon to noon. Bands differ by hatch, lines by
 * dash and by the name at their end; colour only helps.
 */
import { formatInstant, parseInstant } from '../time.ts';
import type { Display } from './display.ts';
import type { NightSheet } from './night-schema.ts';

const WIDTH = 1000;
const LEFT = 46;
const RIGHT = 92;
const AXIS = 18;

type Known = number | null;

interface Frame {
  readonly height: number;
  x(index: number): number;
  y(value: number): number;
}

export function plotsOf(
  sheet: NightSheet,
  show: Display,
): { price: string; temperatures: string; ice: string } {
  return {
    price: pricePlot(sheet, show),
    temperatures: temperaturePlot(sheet, show),
    ice: icePlot(sheet, show),
  };
}

function frameFor(sheet: NightSheet, height: number, low: number, high: number): Frame {
  const count = sheet.trace.mode.length;
  const span = high > low ? high - low : 1;
  return {
    height,
    x: (index) => LEFT + (index / count) * (WIDTH - LEFT - RIGHT),
    y: (value) => 6 + (1 - (value - low) / span) * (height - AXIS - 12),
  };
}

function svg(label: string, height: number, parts: readonly string[]): string {
  return `<svg viewBox="0 0 ${WIDTH} ${height}" role="img" aria-label="${escaped(label)}">${parts.join('')}</svg>`;
}

function bounds(columns: readonly (readonly Known[])[], leastSpan: number): [low: number, high: number] {
  const known = columns.flat().filter((value) => value !== null);
  if (known.length === 0) return [0, leastSpan];
  const [low, high] = [Math.min(...known), Math.max(...known)];
  const pad = Math.max((high - low) * 0.08, (leastSpan - (high - low)) / 2, 0);
  return [low - pad, high + pad];
}

/** A line along the middles of the quarter hours; broken where nothing is known. */
function line(frame: Frame, values: readonly Known[], attributes: string): string {
  const path = stretchesOf(values)
    .map((stretch) =>
      stretch
        .map((at, i) => `${i === 0 ? 'M' : 'L'}${f(frame.x(at + 0.5))} ${f(frame.y(values[at] ?? 0))}`)
        .join(''),
    )
    .join('');
  return path === '' ? '' : `<path d="${path}" fill="none" ${attributes}/>`;
}

function steps(frame: Frame, values: readonly Known[], attributes: string): string {
  const path = stretchesOf(values)
    .map(
      (stretch) =>
        `M${stretch.map((at) => `${f(frame.x(at))} ${f(frame.y(values[at] ?? 0))} ${f(frame.x(at + 1))} ${f(frame.y(values[at] ?? 0))}`).join('L')}`,
    )
    .join('');
  return path === '' ? '' : `<path d="${path}" fill="none" ${attributes}/>`;
}

function wash(frame: Frame, low: readonly Known[], high: readonly Known[]): string {
  const both = low.map((value, at) => (value === null || high[at] === null ? null : value));
  return stretchesOf(both)
    .map((stretch) => {
      const up = stretch.map((at) => `${f(frame.x(at + 0.5))} ${f(frame.y(high[at] ?? 0))}`);
      const down = stretch.toReversed().map((at) => `${f(frame.x(at + 0.5))} ${f(frame.y(low[at] ?? 0))}`);
      return `<path d="M${[...up, ...down].join('L')}Z" class="wash"/>`;
    })
    .join('');
}

/** Indices of neighbours that are known. */
function stretchesOf(values: readonly unknown[]): number[][] {
  return runsOf(values, (value) => value !== null)
    .filter((run) => run.value)
    .map((run) => Array.from({ length: run.to - run.from }, (_, i) => run.from + i));
}

interface Run<K> {
  readonly value: K;
  readonly from: number;
  readonly to: number;
}

function runsOf<T, K>(values: readonly T[], key: (value: T) => K): Run<K>[] {
  const runs: { value: K; from: number; to: number }[] = [];
  for (const [at, item] of values.entries()) {
    const value = key(item);
    const last = runs.at(-1);
    if (last && last.value === value) last.to = at + 1;
    else runs.push({ value, from: at, to: at + 1 });
  }
  return runs;
}

/** Hours along the foot, a hairline at each third hour of local time. */
function hours(sheet: NightSheet, show: Display, frame: Frame): string {
  const { trace } = sheet;
  const startMs = parseInstant(trace.start) ?? 0;
  const parts: string[] = [];
  for (let at = 0; at <= trace.mode.length; at++) {
    const clock = show.clock(formatInstant(startMs + at * trace.stepMs));
    if (!clock.endsWith(':00') || Number(clock.slice(0, 2)) % 3 !== 0) continue;
    const x = f(frame.x(at));
    parts.push(`<path d="M${x} 4V${frame.height - AXIS + 3}" class="grid"/>`);
    parts.push(`<text x="${x}" y="${frame.height - 3}" text-anchor="middle">${clock}</text>`);
  }
  return parts.join('');
}

function endName(frame: Frame, values: readonly Known[], name: string): { y: number; name: string } | null {
  const last = values.findLast((value) => value !== null);
  return last == null ? null : { y: frame.y(last), name };
}

/** Names at the ends of lines, moved apart where they would lie on each other. */
function endNames(names: readonly ({ y: number; name: string } | null)[]): string {
  let below = Number.NEGATIVE_INFINITY;
  return names
    .filter((one) => one !== null)
    .toSorted((a, b) => a.y - b.y)
    .map((one) => {
      const y = Math.max(one.y + 4, below + 13);
      below = y;
      return `<text x="${WIDTH - RIGHT + 6}" y="${f(y)}">${escaped(one.name)}</text>`;
    })
    .join('');
}

function scaleMarks(frame: Frame, values: readonly number[], words: (value: number) => string): string {
  return values
    .map(
      (value) =>
        `<text x="${LEFT - 6}" y="${f(frame.y(value) + 4)}" text-anchor="end">${escaped(words(value))}</text><path d="M${LEFT} ${f(frame.y(value))}H${WIDTH - RIGHT}" class="grid"/>`,
    )
    .join('');
}

/** Three round values across a range. */
function marksBetween(low: number, high: number): number[] {
  const rough = (high - low) / 3;
  const power = 10 ** Math.floor(Math.log10(Math.max(rough, 1e-6)));
  const step = [1, 2, 5, 10].map((one) => one * power).find((one) => one >= rough) ?? 10 * power;
  const first = Math.ceil(low / step) * step;
  return [0, 1, 2, 3].map((at) => first + at * step).filter((value) => value <= high + step * 1e-6);
}

function pricePlot(sheet: NightSheet, show: Display): string {
  const { price } = sheet.trace;
  const [low, high] = bounds([price], 0.05);
  const frame = frameFor(sheet, 74, Math.min(0, low), high);
  const figures = runsOf(price, (value) => value)
    .filter((run) => run.value !== null && run.to - run.from >= 5)
    .map(
      (run) =>
        `<text x="${f((frame.x(run.from) + frame.x(run.to)) / 2)}" y="${f(Math.min(frame.y(run.value ?? 0) + 14, frame.height - AXIS - 4))}" text-anchor="middle">${escaped(show.price(run.value ?? 0))}</text>`,
    )
    .join('');
  return svg(`Price in ${show.currency} per kWh over the night`, frame.height, [
    hours(sheet, show, frame),
    steps(frame, price, 'class="ink"'),
    figures,
    endNames([endName(frame, price, `${show.currency}/kWh`)]),
  ]);
}

function temperaturePlot(sheet: NightSheet, show: Display): string {
  const { outdoorC, roomC, limitC } = sheet.trace;
  const [low, high] = bounds([outdoorC, roomC, limitC], 5);
  const frame = frameFor(sheet, 122, low, high);
  return svg(`Outdoor and room temperature over the night, ${show.temperatureUnit}`, frame.height, [
    hours(sheet, show, frame),
    scaleMarks(frame, marksBetween(low, high), (value) => show.temperature(value)),
    steps(frame, limitC, 'class="limit"'),
    line(frame, outdoorC, 'class="heat"'),
    line(frame, roomC, 'class="ink"'),
    endNames([
      endName(frame, outdoorC, 'outdoor'),
      endName(frame, roomC, 'room'),
      endName(frame, limitC, 'limit'),
    ]),
  ]);
}

const BAND = {
  charging: 'url(#charging)',
  discharging: 'url(#discharging)',
  'charging-while-discharging': 'url(#both)',
  'direct-cooling': 'url(#discharging)',
} as const;
const BAND_NAME = {
  charging: 'charging',
  discharging: 'discharging',
  'charging-while-discharging': 'both',
  'direct-cooling': 'direct',
} as const;

function icePlot(sheet: NightSheet, show: Display): string {
  const { iceKwh, iceLowKwh, iceHighKwh, mode } = sheet.trace;
  const [, high] = bounds([iceKwh, iceLowKwh, iceHighKwh], 2);
  const low = Math.min(0, ...iceLowKwh.filter((value) => value !== null));
  const frame = frameFor(sheet, 156, low, high);
  const foot = frame.height - AXIS - 6;
  const bands = runsOf(mode, (one) => one)
    .map((run) => {
      if (run.value === null || run.value === 'idle') return '';
      const [x, end] = [frame.x(run.from), frame.x(run.to)];
      const name =
        end - x > 70
          ? `<text x="${f((x + end) / 2)}" y="${foot - 26}" text-anchor="middle">${BAND_NAME[run.value]}</text>`
          : '';
      return `<rect x="${f(x)}" y="${foot - 22}" width="${f(end - x)}" height="22" fill="${BAND[run.value]}" class="band"/>${name}`;
    })
    .join('');
  const missing = runsOf(mode, (one) => one === null)
    .filter((run) => run.value && run.to - run.from >= 2)
    .map(
      (run) =>
        `<text x="${f((frame.x(run.from) + frame.x(run.to)) / 2)}" y="20" text-anchor="middle" class="missing">not recorded</text>`,
    )
    .join('');
  return svg(`Ice on hand with its interval and what ran over the night, ${show.heatUnit}`, frame.height, [
    PATTERNS,
    hours(sheet, show, frame),
    scaleMarks(frame, marksBetween(Math.max(0, low), high), (value) => show.heat(value)),
    wash(frame, iceLowKwh, iceHighKwh),
    bands,
    line(frame, iceKwh, 'class="ice"'),
    missing,
    endNames([endName(frame, iceKwh, `ice, ${show.heatUnit}`)]),
  ]);
}

const PATTERNS =
  '<defs><pattern id="charging" width="8" height="8" patternUnits="userSpaceOnUse" patternTransform="rotate(45)"><path d="M0 0V8" class="hatch"/></pattern>' +
  '<pattern id="discharging" width="7" height="7" patternUnits="userSpaceOnUse"><circle cx="3" cy="3" r="1.3" class="dot"/></pattern>' +
  '<pattern id="both" width="8" height="8" patternUnits="userSpaceOnUse"><path d="M0 0L8 8M8 0L0 8" class="hatch"/></pattern></defs>';

function f(value: number): string {
  return String(Math.round(value * 10) / 10);
}

export function escaped(text: string): string {
  return text
    .replaceAll('&', '&amp;')
    .replaceAll('<', '&lt;')
    .replaceAll('>', '&gt;')
    .replaceAll('"', '&quot;');
}
