/** Plant: the commissioning sheet. Points by place in the loop, parts, learned figures, interlocks, settings. */
import type { InterlockRow, LearnedFigure, NowAnswer, PointRow } from '../source.ts';
import { figure, h, type Child } from './dom.ts';
import { age, plain, type Format } from './format.ts';
import { Settings } from './settings.ts';
import { strings } from './strings.ts';
import { Telling } from './told.ts';
import type { Tools, View } from './view.ts';

const words = strings.plant;

export function createPlant(tools: Tools): View {
  const points = wide(words.points);
  const parts = wide(words.parts);
  const learned = wide(words.learned);
  const interlocks = wide(words.interlocks);
  const telling = new Telling(tools);
  const settings = new Settings(tools);
  const element = h('div', {}, h('h1', {}, words.heading));
  for (const part of [points, learned]) element.append(part.section);
  element.append(telling.element, interlocks.section, parts.section, settings.element);
  return {
    element,
    title: strings.views.plant,
    night: null,
    update(shown) {
      const { now, format } = shown;
      points.region.replaceChildren(pointTable(now.points, format));
      interlocks.region.replaceChildren(interlockTable(now.interlocks));
      learned.region.replaceChildren(
        now.learned.length === 0 ? h('p', {}, words.learnedEmpty) : learnedTable(now.learned, format),
      );
      telling.update(shown);
      parts.region.replaceChildren(partTable(now));
      settings.update(shown);
    },
  };
}

/** A section whose table scrolls by itself, so that the page never does sideways. */
function wide(name: string): { section: HTMLElement; region: HTMLElement } {
  const region = h('div', { class: 'wide', tabindex: 0, role: 'region', 'aria-label': name });
  return { section: h('section', {}, h('h2', {}, name), region), region };
}

function table(
  name: string,
  heads: readonly string[],
  bodies: readonly HTMLTableSectionElement[],
): HTMLTableElement {
  return h(
    'table',
    {},
    h('caption', { class: 'unseen' }, name),
    h('thead', {}, h('tr', {}, ...heads.map((head) => h('th', { scope: 'col' }, head)))),
    ...bodies,
  );
}

const row = (head: Child, ...cells: Child[]): HTMLTableRowElement =>
  h('tr', {}, h('th', { scope: 'row' }, head), ...cells.map((cell) => h('td', {}, cell)));

type Place = keyof typeof words.places;

const PLACES: readonly (readonly [place: Place, pattern: RegExp])[] = [
  ['bank', /^(bank-|ice-at|drip)/],
  ['loop', /^(leaving|entering|loop|pump|fan)/],
  ['machine', /^(chiller|coolant|high-pressure)/],
  ['rooms', /^(room|occupied)/],
  ['outdoors', /^outdoor/],
  ['power', /^(panel|battery|generator|house|grid|prices)/],
  ['other', /./],
];

const placeOf = (point: string): Place => PLACES.find(([, pattern]) => pattern.test(point))?.[0] ?? 'other';

function pointTable(rows: readonly PointRow[], format: Format): HTMLTableElement {
  const bodies = PLACES.map(([place]) => ({
    place,
    rows: rows.filter(({ point }) => placeOf(point) === place),
  }))
    .filter((group) => group.rows.length > 0)
    .map((group) =>
      h(
        'tbody',
        {},
        h('tr', { class: 'total' }, h('th', { scope: 'rowgroup', colspan: 7 }, words.places[group.place])),
        ...group.rows.map((point) => pointRow(point, format)),
      ),
    );
  return table(words.points, Object.values(words.columns), bodies);
}

function pointRow(point: PointRow, format: Format): HTMLTableRowElement {
  const heard = point.fresh ? words.fresh : point.heard ? words.stale : words.never;
  const [low, high] = point.plausible;
  const remark = point.setAside ? words.setAside(point.setAside) : point.why || point.what;
  const name = h('span', {}, point.point, point.required ? h('small', {}, words.required) : null);
  return row(
    name,
    figure(point.last, point.last === null ? strings.none : format.value(point.last, point.unit)),
    point.ageMs === null ? strings.none : age(point.ageMs),
    h('span', { class: point.fresh ? '' : 'caution' }, heard),
    errorText(point, format),
    h('span', { class: 'note' }, remark),
    h('span', { class: 'quiet' }, words.range(format.value(low, point.unit), format.value(high, point.unit))),
  );
}

function errorText({ errorAtIcePointK, errorSdK, errorDateMs }: PointRow, format: Format): string {
  if (errorAtIcePointK === null) return strings.none;
  const sd = errorSdK === null ? null : format.difference(errorSdK);
  return words.error(
    format.difference(errorAtIcePointK),
    sd,
    errorDateMs === null ? '' : format.day(errorDateMs),
  );
}

function learnedTable(list: readonly LearnedFigure[], format: Format): HTMLElement {
  const rows = list.map((learned) => {
    const what = h('span', { class: 'phrase' }, words.learnedNames[learned.name]?.what ?? learned.name);
    const text = (value: number): string => learnedText(learned, value, format);
    return row(
      what,
      figure(learned.value, text(learned.value)),
      figure(learned.sd, text(learned.sd).replace(/ .*$/, '')),
    );
  });
  const figures = table(words.learned, [words.figure, words.value, words.sd], [h('tbody', {}, ...rows)]);
  return h('div', {}, figures, h('p', { class: 'quiet' }, words.sdMeans));
}

function learnedText({ name, unit }: LearnedFigure, value: number, format: Format): string {
  const as = words.learnedNames[name]?.as;
  if (as === '%') return `${plain(100 * value, 0)} %`;
  if (as !== undefined)
    return `${plain((100 * value) / (format.temperatureNumber(1) - format.temperatureNumber(0)), 1)} %`;
  return unit === '' ? plain(value, 2) : format.value(value, unit);
}

/** Who holds something back, with its sentence; the quiet ones are only named. */
function interlockTable(list: readonly InterlockRow[]): HTMLElement {
  const speaking = list.filter(({ speaks }) => speaks);
  const quiet = list.filter(({ speaks }) => !speaks).map(({ name }) => name);
  const rows = speaking.map(({ name, sentence }) => row(name, h('span', { class: 'note' }, sentence)));
  return h(
    'div',
    {},
    rows.length === 0
      ? h('p', {}, words.noneSpeaks)
      : table(words.interlocks, [words.speaks, words.says], [h('tbody', {}, ...rows)]),
    h('p', { class: 'quiet' }, words.quiet(quiet.join(', '))),
  );
}

function partTable({ health }: NowAnswer): HTMLTableElement {
  const { broker, clock, store } = health;
  const part = (name: string, state: keyof typeof words.words, detail: string): HTMLTableRowElement =>
    row(name, words.words[state], h('span', { class: 'note' }, detail));
  const rows = [
    part(words.broker, broker.state, broker.detail),
    part(words.clock, clock.state, clock.detail),
    part(words.store, store.state, store.detail),
  ];
  return table(words.parts, [words.part, words.state, words.says], [h('tbody', {}, ...rows)]);
}
