/** Nights: a ruled ledger, a row a night, months summed, notes in the margin, and what drifts. */
import type { NightRow, NightsView } from '../source.ts';
import { read } from './api.ts';
import { figure, h, setText } from './dom.ts';
import { calendarDay, calendarMonth, plain, shiftDate, type Format } from './format.ts';
import { refusal } from './owner.ts';
import { strings } from './strings.ts';
import type { Shown, Tools, View } from './view.ts';

const words = strings.nights;

export class Nights implements View {
  readonly title = strings.views.nights;
  readonly night = null;
  readonly element: HTMLElement;
  readonly #select = h(
    'select',
    { id: 'nights-range' },
    ...Object.entries(words.ranges).map(([days, text]) => h('option', { value: days }, text)),
  );
  readonly #csv = h('a', { href: '/api/nights.csv', download: 'nights.csv' }, words.csv);
  readonly #drifts = h('section', { 'aria-label': words.drifts, hidden: true });
  readonly #ledger = h('div', {
    class: 'wide ledger',
    tabindex: 0,
    role: 'region',
    'aria-label': words.heading,
  });
  readonly #note = h('p', { class: 'sentence', role: 'status' });
  #shown: Shown | null = null;
  #nights: NightsView | null = null;
  /** What was asked for last; asked again only when the range or the count of nights changes. */
  #asked = '';

  constructor({ live }: Tools) {
    const tools = h(
      'p',
      { class: 'tools' },
      h('label', { for: 'nights-range' }, words.range),
      this.#select,
      this.#csv,
    );
    this.element = h('div', {}, h('h1', {}, words.heading), this.#drifts, tools, this.#note, this.#ledger);
    const again = (): void => {
      this.#asked = '';
      void this.#load();
    };
    this.#select.addEventListener('change', again);
    live.onNight(again);
  }

  update(shown: Shown): void {
    const reformat = this.#shown?.format !== shown.format;
    this.#shown = shown;
    void this.#load();
    if (reformat) this.#draw();
  }

  async #load(): Promise<void> {
    if (!this.#shown) return;
    const { now, nowMs, format } = this.#shown;
    const from = shiftDate(format.date(nowMs), -Number(this.#select.value));
    const key = `${from} ${now.nightsClosed}`;
    if (this.#asked === key) return;
    this.#asked = key;
    this.#csv.setAttribute('href', `/api/nights.csv?from=${from}`);
    try {
      this.#nights = await read<NightsView>(`/api/nights?from=${from}`);
      this.#draw();
    } catch (error) {
      this.#asked = '';
      setText(this.#note, refusal(error));
    }
  }

  #draw(): void {
    if (!this.#shown || !this.#nights) return;
    const { now, format } = this.#shown;
    const { rows, drifts } = this.#nights;
    setText(this.#note, rows.length > 0 ? '' : now.nightsClosed === 0 ? words.empty : words.emptyRange);
    this.#ledger.hidden = rows.length === 0;
    this.#ledger.replaceChildren(ledger(rows, format, now.site.currency));
    this.#drifts.hidden = drifts.length === 0;
    const items = drifts.map(({ sinceDate, sentence }) =>
      h('li', {}, h('strong', {}, sentence), ` ${words.since(calendarDay(sinceDate))}`),
    );
    this.#drifts.replaceChildren(h('h2', {}, words.drifts), h('ul', { class: 'notices' }, ...items));
  }
}

interface Column {
  readonly key: keyof typeof words.columns;
  readonly value: (row: NightRow) => number | null;
  readonly text: (value: number | null, format: Format) => string;
  /** How a month is summed up; null when a sum would mean nothing. */
  readonly total: 'sum' | null;
}

const energy = (value: number | null, format: Format): string => format.energyFigure(value, 2);
const fixed =
  (digits: number) =>
  (value: number | null): string =>
    value === null ? strings.none : plain(value, digits);

const degreeHours = (value: number | null, format: Format): string =>
  value === null ? strings.none : plain(format.degreeHours(value), 1);

const COLUMNS: readonly Column[] = [
  { key: 'start', value: (row) => row.iceStartKwh, text: energy, total: null },
  { key: 'end', value: (row) => row.iceEndKwh, text: energy, total: null },
  { key: 'made', value: (row) => row.madeKwh, text: energy, total: 'sum' },
  { key: 'melted', value: (row) => row.meltedKwh, text: energy, total: 'sum' },
  { key: 'leaked', value: (row) => row.leakedKwh, text: energy, total: 'sum' },
  { key: 'electricity', value: (row) => row.electricityKwh, text: fixed(2), total: 'sum' },
  { key: 'cop', value: (row) => row.cop, text: fixed(2), total: null },
  { key: 'cost', value: (row) => row.costMoney, text: fixed(2), total: 'sum' },
  { key: 'saved', value: (row) => row.savedMoney, text: fixed(2), total: 'sum' },
  { key: 'warm', value: (row) => row.warmKh, text: degreeHours, total: 'sum' },
  { key: 'residual', value: (row) => row.residualPct, text: fixed(1), total: null },
];

function ledger(rows: readonly NightRow[], format: Format, currency: string): HTMLTableElement {
  const heads = [words.columns.night, ...COLUMNS.map(({ key }) => words.columns[key]), words.columns.note];
  return h(
    'table',
    {},
    h('caption', {}, h('span', {}, words.caption(format.energyUnit, format.degreeHourUnit, currency))),
    h('thead', {}, h('tr', {}, ...heads.map((head) => h('th', { scope: 'col' }, head)))),
    ...months(rows).map((month) => monthBody(month, format)),
  );
}

/** Newest month first, newest night first. */
function months(rows: readonly NightRow[]): NightRow[][] {
  const list: NightRow[][] = [];
  for (const row of rows.toSorted((a, b) => (a.date < b.date ? 1 : -1))) {
    const month = list.at(-1);
    if (month?.[0].date.slice(0, 7) === row.date.slice(0, 7)) month.push(row);
    else list.push([row]);
  }
  return list;
}

function monthBody(rows: readonly NightRow[], format: Format): HTMLTableSectionElement {
  const totals = COLUMNS.map(({ value, text, total }) => {
    const known = rows.map(value).filter((figureOf) => figureOf !== null);
    const sum = total === null || known.length === 0 ? null : known.reduce((a, b) => a + b, 0);
    return h('td', {}, sum === null ? '' : figure(sum, text(sum, format)));
  });
  const name = words.total(calendarMonth(rows[0].date), rows.length);
  const head = h('tr', { class: 'total' }, h('th', { scope: 'row' }, name), ...totals, h('td'));
  return h('tbody', {}, head, ...rows.map((row) => nightRow(row, format)));
}

function nightRow(row: NightRow, format: Format): HTMLTableRowElement {
  const notes = [
    row.partial ? words.partial : '',
    row.revision > 1 ? words.revised(row.revision) : '',
    row.note,
  ].filter(Boolean);
  return h(
    'tr',
    {},
    h('th', { scope: 'row' }, h('a', { href: `#/nights/${row.date}` }, calendarDay(row.date))),
    ...COLUMNS.map(({ value, text }) => {
      const raw = value(row);
      return h('td', {}, raw === null ? strings.none : figure(raw, text(raw, format)));
    }),
    h('td', { class: 'note' }, notes.join('; ')),
  );
}
