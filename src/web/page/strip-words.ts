/** The strip in words and figures: the row beneath the reading line, its sentence, and the table. */
import { figure, h } from './dom.ts';
import { plain, type Format } from './format.ts';
import type { StripData } from './strip-data.ts';
import { readStrip, type StripReading } from './strip-read.ts';
import { strings } from './strings.ts';

const words = strings.strip.read;
const STEP_MS = 900_000;

interface Cell {
  readonly name: string;
  readonly value: number | null;
  readonly text: string;
}

const known = (value: number | null, text: string): string => (value === null ? strings.none : text);

function cells(reading: StripReading, format: Format, withThought: boolean): Cell[] {
  const { ahead, outdoorC, roomC, limitC, iceKwh, iceLowKwh, iceHighKwh, mode } = reading;
  const planned = (text: string): string => (ahead && text !== strings.none ? words.planned(text) : text);
  const range =
    iceLowKwh === null || iceHighKwh === null
      ? ''
      : strings.figures.range('', format.energyFigure(iceLowKwh), format.energyFigure(iceHighKwh));
  const limit = limitC === null ? '' : ` (${format.temperatureFigure(limitC)})`;
  const outdoor = known(outdoorC, format.temperature(outdoorC));
  const ice = known(iceKwh, `${format.energy(iceKwh)}${range}`);
  const list: Cell[] = [
    { name: words.price, value: reading.price, text: known(reading.price, plain(reading.price, 2)) },
    {
      name: words.outdoor,
      value: outdoorC,
      text: ahead && outdoorC !== null ? words.forecast(outdoor) : outdoor,
    },
    { name: words.room, value: roomC, text: known(roomC, `${format.temperature(roomC)}${limit}`) },
    { name: words.ice, value: iceKwh, text: planned(ice) },
    { name: words.runs, value: null, text: planned(mode === null ? strings.none : strings.doing(mode)) },
  ];
  const thought = reading.thoughtIceKwh;
  if (withThought)
    list.push({ name: words.thought, value: thought, text: known(thought, format.energy(thought)) });
  return list;
}

const pair = (name: string, content: Node): HTMLElement =>
  h('div', {}, h('dt', {}, name), h('dd', {}, content));

export function readingRow(reading: StripReading, format: Format, withThought: boolean): HTMLElement {
  return h(
    'dl',
    {},
    pair(words.time, h('span', {}, format.clock(reading.atMs))),
    ...cells(reading, format, withThought).map(({ name, value, text }) => pair(name, figure(value, text))),
  );
}

export function readingSentence(reading: StripReading, format: Format): string {
  const parts = cells(reading, format, reading.thoughtIceKwh !== null)
    .filter(({ text }) => text !== strings.none)
    .map(({ name, text }) => `${name} ${text}`);
  return [format.clock(reading.atMs), ...parts].join(', ');
}

export function stripTable(data: StripData, format: Format, day: string): HTMLTableElement {
  const withThought = data.thought !== null;
  const heads = [
    words.time,
    ...cells(readStrip(data, data.startMs), format, withThought).map(({ name }) => name),
  ];
  const count = Math.round((data.endMs - data.startMs) / STEP_MS);
  const rows = Array.from({ length: count }, (_, i) => {
    const reading = readStrip(data, data.startMs + i * STEP_MS);
    return h(
      'tr',
      reading.ahead ? { class: 'ahead' } : {},
      h('th', { scope: 'row' }, format.clock(reading.atMs)),
      ...cells(reading, format, withThought).map(({ value, text }) => h('td', {}, figure(value, text))),
    );
  });
  return h(
    'table',
    {},
    h('caption', {}, strings.strip.tableCaption(day)),
    h('thead', {}, h('tr', {}, ...heads.map((head) => h('th', { scope: 'col' }, head)))),
    h('tbody', {}, ...rows),
  );
}
