/** Drawing the strip: paper, lanes, pen lines and pencil lines, as SVG. Colour is never the only sign. */
import type { Mode } from '../../commands.ts';
import { svg } from './dom.ts';
import { plain, type Format } from './format.ts';
import type { Range, Sample, Stretch, StripData } from './strip-data.ts';
import {
  LANES,
  MARGIN_WIDTH,
  PAPER_HEIGHT,
  hours,
  pieces,
  windowOf,
  type Geometry,
  type Lane,
  type Scale,
} from './strip-geometry.ts';
import { strings } from './strings.ts';

const words = strings.strip;
/** Text needs this much room to be written into a step or a band. */
const ROOM_FOR_FIGURE = 34;
const ROOM_FOR_WORD = 48;
/** A step lower than this has its figure above it. */
const ROOM_UNDER_STEP = 20;
/** Width that a name at a line's end takes; it is written clear of all of the line in it. */
const ROOM_FOR_NAME = 70;
const ROOM_FOR_LONG_WORD = 144;

export interface DrawSettings {
  readonly format: Format;
  readonly reserveKwh: number;
}

export function drawPaper(data: StripData, g: Geometry, { format, reserveKwh }: DrawSettings): SVGSVGElement {
  const size = { width: g.width, height: PAPER_HEIGHT, viewBox: `0 0 ${g.width} ${PAPER_HEIGHT}` };
  return svg(
    'svg',
    { ...size, class: 'paper', 'aria-hidden': 'true', focusable: 'false' },
    patterns(),
    ruling(data, g, format),
    ...data.gaps.flatMap((gap) => gapMarks(gap, g)),
    priceLane(data, g),
    temperatureLane(data, g, format),
    iceLane(data, g, reserveKwh, format),
    runsLane(data, g),
    ...thoughtMarks(data, g),
    nowLine(data, g),
    svg('line', { class: 'reading-line', y1: 18, y2: PAPER_HEIGHT - 28, x1: 0, x2: 0 }),
  );
}

const tickFigure = (y: number, text: string): SVGTextElement =>
  svg('text', { x: MARGIN_WIDTH - 6, y: y + 5, 'text-anchor': 'end', class: 'tick' }, text);

/** The figures left of the paper; they stay while it rolls. */
export function drawMargin(g: Geometry, format: Format): SVGSVGElement {
  const degrees = format.units === 'SI' ? (t: number) => t : (t: number) => ((t - 32) * 5) / 9;
  const kwh = format.energyNumber(1);
  return svg(
    'svg',
    { class: 'margin', width: MARGIN_WIDTH, height: PAPER_HEIGHT, 'aria-hidden': 'true', focusable: 'false' },
    ...g.temperatureTicks.map((tick) => tickFigure(g.temperature(degrees(tick)), plain(tick, 0))),
    ...g.iceTicks.map((tick) => tickFigure(g.ice(tick / kwh), plain(tick, 0))),
  );
}

const pattern = (id: string, ...children: Node[]): SVGPatternElement =>
  svg('pattern', { id, width: 8, height: 8, patternUnits: 'userSpaceOnUse' }, ...children);
const stroke = (d: string): SVGPathElement => svg('path', { d, class: 'hatch' });

/** Charging is hatched, discharging dotted, both at once crossed, direct cooling ruled. */
function patterns(): SVGDefsElement {
  const falling = 'M-2 2l4-4M0 8l8-8M6 10l4-4';
  const rising = 'M-2 6l4 4M0 0l8 8M6-2l4 4';
  return svg(
    'defs',
    {},
    pattern('runs-charging', stroke(falling)),
    pattern('runs-discharging', svg('circle', { cx: 4, cy: 4, r: 1.5, class: 'dot' })),
    pattern('runs-charging-while-discharging', stroke(falling), stroke(rising)),
    pattern('runs-direct-cooling', stroke('M4 0v8')),
  );
}

function ruling(data: StripData, g: Geometry, format: Format): SVGGElement {
  const marks = hours(data, format).flatMap((atMs) => {
    const hour = format.minuteOfDay(atMs) / 60;
    const x = g.x(atMs);
    const named = hour % 3 === 0;
    const rule = svg('line', {
      x1: x,
      x2: x,
      y1: 18,
      y2: PAPER_HEIGHT - 28,
      class: named ? 'hour named' : 'hour',
    });
    const hole = svg('circle', { cx: x, cy: 7, r: 2.5, class: 'hole' });
    if (!named) return [rule, hole];
    // At the edge of a window a figure would be cut in two: there it stands on the side that is seen.
    const [fromLeft, toRight] = [x - windowOf(g, x), g.width - x];
    const anchor = fromLeft < 20 ? 'start' : toRight < 20 ? 'end' : 'middle';
    const place = fromLeft < 20 ? x + 3 : x;
    return [
      rule,
      hole,
      svg(
        'text',
        { x: place, y: PAPER_HEIGHT - 10, 'text-anchor': anchor, class: 'tick' },
        format.clock(atMs),
      ),
    ];
  });
  const frames = Object.values(LANES).map(({ top, height }) =>
    svg('rect', { x: 0, y: top, width: g.width, height, class: 'lane' }),
  );
  return svg('g', { class: 'ruling' }, ...frames, ...marks);
}

function gapMarks({ fromMs, toMs }: Stretch<null>, g: Geometry): SVGElement[] {
  const x = g.x(fromMs);
  const width = g.x(toMs) - x;
  const lanes: Lane[] = [LANES.temperatures, LANES.ice, LANES.runs];
  const blanks = lanes.map(({ top, height }) => svg('rect', { x, y: top, width, height, class: 'blank' }));
  const middle = LANES.ice.top + LANES.ice.height / 2;
  const names = pieces(g, x, x + width).filter((piece) => piece.width >= ROOM_FOR_WORD);
  return [
    ...blanks,
    ...names.map((piece) => label(piece.x + piece.width / 2, middle, words.gap, 'middle', 'quiet')),
  ];
}

function label(
  x: number,
  y: number,
  text: string,
  anchor: 'start' | 'middle' | 'end',
  kind: string,
): SVGTextElement {
  return svg('text', { x, y, 'text-anchor': anchor, class: `label ${kind}` }, text);
}

const point = (x: number, y: number): string => `${x.toFixed(1)} ${y.toFixed(1)}`;

function line(samples: readonly Sample[], x: Scale, y: Scale, kind: string): SVGPathElement {
  const d = samples.map(({ atMs, value }, i) => `${i === 0 ? 'M' : 'L'}${point(x(atMs), y(value))}`).join('');
  return svg('path', { d, class: `line ${kind}` });
}

function wash(ranges: readonly Range[], x: Scale, y: Scale, kind: string): SVGPathElement | null {
  if (ranges.length < 2) return null;
  const top = ranges.map(({ atMs, high }) => point(x(atMs), y(high)));
  const bottom = ranges.toReversed().map(({ atMs, low }) => point(x(atMs), y(low)));
  return svg('path', { d: `M${[...top, ...bottom].join('L')}Z`, class: `wash ${kind}` });
}

function priceLane(data: StripData, g: Geometry): SVGGElement {
  const floor = LANES.price.top + LANES.price.height;
  const step = ({ fromMs, toMs, value }: Stretch<number>, kind: string): SVGElement[] => {
    const [x, y, width] = [g.x(fromMs), g.price(value), g.x(toMs) - g.x(fromMs)];
    const area = svg('rect', { x, y, width, height: Math.max(0, floor - y), class: 'price-area' });
    const top = svg('line', { x1: x, x2: x + width, y1: y, y2: y, class: `line price ${kind}` });
    const baseline = floor - y < ROOM_UNDER_STEP ? y - 5 : floor - 6;
    const figures = pieces(g, x, x + width).filter((piece) => piece.width >= ROOM_FOR_FIGURE);
    return [
      area,
      top,
      ...figures.map((piece) =>
        label(piece.x + piece.width / 2, baseline, plain(value, 2), 'middle', 'figure'),
      ),
    ];
  };
  const steps = [
    ...data.price.past.flatMap((stretch) => step(stretch, 'pen')),
    ...data.price.ahead.flatMap((stretch) => step(stretch, 'pencil')),
  ];
  return svg('g', {}, ...steps);
}

interface EndLabel {
  readonly x: number;
  /** Whether there is no room left of the end in what is seen with it. */
  readonly atLeft: boolean;
  /** Top and bottom of the line beside its name. */
  readonly top: number;
  readonly bottom: number;
  readonly text: string;
  readonly kind: string;
}

/** Names at line ends, left of the end where there is room: the upper line's above it, the lower line's below. */
function endLabels(ends: readonly (EndLabel | null)[], lane: Lane): SVGTextElement[] {
  const list = ends.filter((end) => end !== null).toSorted((a, b) => a.top - b.top);
  return list.map(({ x, atLeft, top, bottom, text, kind }, i) => {
    const y = i > 0 ? bottom + 16 : Math.max(lane.top + 12, top - 6);
    return atLeft ? label(x + 6, y, text, 'start', kind) : label(x - 6, y, text, 'end', kind);
  });
}

function endOf(
  samples: readonly Sample[] | undefined,
  g: Geometry,
  y: Scale,
  text: string,
  kind: string,
): EndLabel | null {
  const last = samples?.at(-1);
  if (!samples || !last) return null;
  const x = g.x(last.atMs);
  const beside = samples.filter(({ atMs }) => x - g.x(atMs) < ROOM_FOR_NAME).map(({ value }) => y(value));
  const atLeft = x - windowOf(g, x) < ROOM_FOR_NAME;
  return { x, atLeft, top: Math.min(...beside), bottom: Math.max(...beside), text, kind };
}

/** Names of a pencilled line in each window that shows enough of it. */
function pencilLabels(
  samples: readonly Sample[],
  g: Geometry,
  y: Scale,
  text: string,
  kind: string,
  lane: Lane,
): SVGTextElement[] {
  const first = samples[0];
  const last = samples.at(-1);
  if (!first || !last) return [];
  return pieces(g, g.x(first.atMs), g.x(last.atMs))
    .filter(({ width }) => width > ROOM_FOR_NAME)
    .flatMap(({ x, width }) => {
      const seen = samples.filter(({ atMs }) => g.x(atMs) >= x && g.x(atMs) <= x + width);
      return endLabels([endOf(seen, g, y, text, kind)], lane);
    });
}

function temperatureLane(data: StripData, g: Geometry, format: Format): SVGGElement {
  const y = g.temperature;
  const limit = data.limit.at(-1);
  const past = [
    endOf(data.outdoor.at(-1), g, y, words.outdoor, 'ink'),
    endOf(data.room.at(-1), g, y, words.room, 'heat'),
  ];
  return svg(
    'g',
    {},
    wash(data.outdoorAheadRange, g.x, y, 'ink'),
    ...data.limit.map((run) => line(run, g.x, y, 'heat limit')),
    ...data.outdoor.map((run) => line(run, g.x, y, 'ink pen')),
    line(data.outdoorAhead, g.x, y, 'ink pencil'),
    ...data.room.map((run) => line(run, g.x, y, 'heat pen')),
    ...endLabels(past, LANES.temperatures),
    ...pencilLabels(data.outdoorAhead, g, y, words.forecast, 'ink', LANES.temperatures),
    ...limitNames(limit ?? [], g, format),
  );
}

/** The limit's name and figure, once in each window. */
function limitNames(limit: readonly Sample[], g: Geometry, format: Format): SVGTextElement[] {
  const first = limit[0];
  const last = limit.at(-1);
  if (!first || !last) return [];
  return pieces(g, g.x(first.atMs), g.x(last.atMs))
    .filter(({ width }) => width > ROOM_FOR_NAME)
    .map(({ x, width }) => {
      const value = limit.find(({ atMs }) => g.x(atMs) >= x)?.value ?? last.value;
      const text = `${words.limit} ${format.temperatureFigure(value)}`;
      // Where the line ends early in the window its name goes on from it, clear of the names of the other lines.
      const goesOn = width < ROOM_FOR_LONG_WORD && g.window - width > ROOM_FOR_LONG_WORD;
      return goesOn
        ? label(x + width + 6, g.temperature(last.value) + 5, text, 'start', 'heat')
        : label(x + 6, g.temperature(value) - 5, text, 'start', 'heat');
    });
}

function iceLane(data: StripData, g: Geometry, reserveKwh: number, format: Format): SVGGElement {
  const { thought } = data;
  const thoughtText = thought ? words.thoughtAt(format.clock(thought.madeMs)) : '';
  const reserve = g.ice(reserveKwh);
  return svg(
    'g',
    {},
    svg('line', { x1: 0, x2: g.width, y1: reserve, y2: reserve, class: 'line reserve' }),
    ...data.iceRange.map((run) => wash(run, g.x, g.ice, 'ice')),
    wash(data.iceAheadRange, g.x, g.ice, 'ice plan'),
    ...data.ice.map((run) => line(run, g.x, g.ice, 'ice pen')),
    line(data.iceAhead, g.x, g.ice, 'ice pencil'),
    ...endLabels([endOf(data.ice.at(-1), g, g.ice, words.ice, 'ice')], LANES.ice),
    ...pencilLabels(data.iceAhead, g, g.ice, words.planned, 'ice', LANES.ice),
    ...pencilLabels(thought?.ice ?? [], g, g.ice, thoughtText, 'caution', LANES.ice),
  );
}

function runsLane(data: StripData, g: Geometry): SVGGElement {
  const last = data.runs.past.at(-1);
  const first = data.runs.ahead[0];
  const goesOn =
    last !== undefined && last.value === first?.value && g.x(last.toMs) - g.x(last.fromMs) >= ROOM_FOR_WORD;
  return svg(
    'g',
    {},
    ...data.runs.past.flatMap((stretch) => runBand(stretch, g, 'pen', true)),
    ...data.runs.ahead.flatMap((stretch, i) => runBand(stretch, g, 'pencil', i > 0 || !goesOn)),
  );
}

/** `named` false: the band goes on from one that bears the word already. */
function runBand(
  { fromMs, toMs, value }: Stretch<Mode>,
  g: Geometry,
  kind: string,
  named: boolean,
): SVGElement[] {
  if (value === 'idle') return [];
  const { top, height } = LANES.runs;
  const [x, width] = [g.x(fromMs), g.x(toMs) - g.x(fromMs)];
  const fill = `url(#runs-${value})`;
  const area = svg('rect', { x, y: top + 3, width, height: height - 6, fill, class: `band ${kind}` });
  if (!named) return [area];
  const wide = pieces(g, x, x + width).filter((piece) => piece.width >= ROOM_FOR_WORD);
  const names = wide.map((piece) => {
    const word = piece.width < ROOM_FOR_LONG_WORD ? words.band[value] : strings.doing(value);
    return label(piece.x + piece.width / 2, top + height / 2 + 5, word, 'middle', 'ice');
  });
  return [area, ...names];
}

function thoughtMarks({ thought }: StripData, g: Geometry): SVGElement[] {
  if (!thought) return [];
  return [line(thought.outdoor, g.x, g.temperature, 'thought'), line(thought.ice, g.x, g.ice, 'thought')];
}

/** The pen: the one thing that moves. */
function nowLine(data: StripData, g: Geometry): SVGGElement | null {
  if (data.nowMs < data.startMs || data.nowMs > data.endMs) return null;
  const x = g.x(data.nowMs);
  const atRight = x - windowOf(g, x) > g.window - ROOM_FOR_WORD;
  return svg(
    'g',
    { class: 'now' },
    svg('line', { x1: x, x2: x, y1: 22, y2: PAPER_HEIGHT - 28 }),
    svg('path', { d: `M${x - 6} 14h12l-6 10z` }),
    label(atRight ? x - 10 : x + 10, 24, words.now, atRight ? 'end' : 'start', 'heat'),
  );
}
