/** Plant: the commissioning sheet. Points by place in the loop, parts, learned figures, interlocks, settings. */
import type { InterlockRow, LearnedFigure, NowAnswer, PointRow } from '../source.ts';
import { figure, h, type Child } from './dom.ts';
import { age, plain, type Format } from './format.ts';
import { Settings } from './settings.ts';
import { strings } from './strings.ts';
import type { Tools, View } from './view.ts';

const words = strings.plant;

export function createPlant(tools: Tools): View {
  const points = wide(words.points);
  const parts = wide(words.parts);
  const learned = wide(words.learned);
  const interlocks = wide(words.interlocks);
  const settings = new Settings(tools);
  const element = h('div', {}, h('h1', {}, words.heading));
  for (const part of [points, interlocks, learned, parts]) element.append(part.section);
  element.append(settings.element);
  return {
    element,
    title: strings.views.plant,
    night: null,
    update(shown) {
      const { now, format } = shown;
      points.region.replaceChildren(pointTable(now.points, format));
      interlocks.region.replaceChildren(interlockTable(now.interlocks));
      learned.region.replaceChildren(
        now.learned.length === 0 ? h('p', {}, words.learnedEmpty) : learnedTable(now.learned),
      );
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

function learnedTable(list: readonly LearnedFigure[]): HTMLTableElement {
  const rows = list.map(({ name, value, sd, unit }) => {
    const digits = Math.abs(value) >= 100 ? 0 : Math.abs(value) >= 10 ? 1 : 2;
    return row(name, figure(value, plain(value, digits)), figure(sd, plain(sd, digits)), unit);
  });
  return table(words.learned, [words.figure, words.value, words.sd, words.unit], [h('tbody', {}, ...rows)]);
}

function interlockTable(list: readonly InterlockRow[]): HTMLTableElement {
  const rows = list.map(({ name, speaks, sentence }) =>
    row(
      name,
      h('span', { class: speaks ? 'caution' : '' }, speaks ? words.speaks : words.quiet),
      h('span', { class: 'note' }, sentence),
    ),
  );
  return table(words.interlocks, [words.interlock, words.state, words.says], [h('tbody', {}, ...rows)]);
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
