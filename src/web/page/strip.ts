/** The strip as a thing to use: a night's paper, a reading line, a table of the same, an earlier thought laid over. */
import type { PlanRecord } from '../../record.ts';
import type { RecordColumns } from '../source.ts';
import { read } from './api.ts';
import { button, h, setText } from './dom.ts';
import { calendarDay, instant } from './format.ts';
import { drawMargin, drawPaper } from './strip-draw.ts';
import { WINDOWS_WHEN_NARROW, geometry, type Geometry } from './strip-geometry.ts';
import {
  STRIP_FIELDS,
  stripData,
  stripRecords,
  withRecord,
  type StripData,
  type StripRecord,
} from './strip-data.ts';
import { listenForReading } from './strip-keys.ts';
import { readStrip } from './strip-read.ts';
import { readingRow, readingSentence, stripTable } from './strip-words.ts';
import { strings } from './strings.ts';
import type { Shown } from './view.ts';

const words = strings.strip;
const STEP_MS = 900_000;
const MINUTE_MS = 60_000;
/** Six in the evening to midnight: where another night's paper opens. */
const EVENING_WINDOW = 1;
/** The plan that is laid over is the first one made in this time after noon. */
const NOON_MS = 1_800_000;

interface Edges {
  readonly startMs: number;
  readonly endMs: number;
}

export class Strip {
  readonly element: HTMLElement;
  readonly #margin = h('div', { class: 'strip-margin' });
  readonly #names = h('div', { class: 'strip-names', 'aria-hidden': 'true' });
  readonly #row = h('div', { class: 'reading' });
  readonly #note = h('p', { class: 'quiet', role: 'status' });
  readonly #roll = h('div', {
    class: 'strip-roll',
    tabindex: 0,
    role: 'slider',
    'aria-label': words.label,
    'aria-description': words.help,
    'aria-orientation': 'horizontal',
  });
  readonly #paper = h('div', { class: 'strip' }, this.#margin, this.#roll, this.#names);
  readonly #table = h('div', {
    class: 'wide long',
    tabindex: 0,
    role: 'region',
    'aria-label': words.asTable,
    hidden: true,
  });
  readonly #tableButton = button(words.asTable, { 'aria-pressed': 'false' }, () => this.#toggleTable());
  readonly #thoughtButton = button(
    words.thought,
    { 'aria-pressed': 'false' },
    () => void this.#toggleThought(),
  );

  #date = '';
  #records: readonly StripRecord[] = [];
  #thought: PlanRecord | null = null;
  #message = '';
  /** Where the reading line stands; null follows the pen. */
  #readMs: number | null = null;
  #shown: Shown | null = null;
  #drawn: { data: StripData; g: Geometry } | null = null;
  #placed = '';

  constructor() {
    const tools = h('div', { class: 'tools' }, this.#tableButton, this.#thoughtButton);
    this.element = h('div', {}, this.#paper, this.#row, this.#table, this.#note, tools);
    listenForReading(this.#roll, {
      moveBy: (ms) => this.#moveBy(ms),
      moveTo: (atMs) => this.#moveTo(atMs),
      toggleTable: () => this.#toggleTable(),
      edges: () => this.#edges(),
      atMs: (x) => this.#drawn?.g.atMs(x) ?? 0,
    });
    this.#table.addEventListener('keydown', (event) => {
      if (event.key === 't' && !event.ctrlKey && !event.metaKey && !event.altKey) this.#toggleTable();
    });
    new ResizeObserver(() => this.#draw()).observe(this.#roll);
  }

  /** Loads a night and draws it. Throws `ApiProblem`. */
  async show(date: string): Promise<void> {
    this.#date = date;
    this.#thought = null;
    this.#message = '';
    this.#readMs = null;
    this.#thoughtButton.setAttribute('aria-pressed', 'false');
    const edges = this.#edges();
    if (!edges) return;
    const span = `from=${instant(edges.startMs)}&to=${instant(edges.endMs)}`;
    const columns = await read<RecordColumns>(
      `/api/records?${span}&every=PT5M&fields=${STRIP_FIELDS.join(',')}`,
    );
    if (this.#date !== date) return;
    this.#records = stripRecords(columns);
    this.#draw();
  }

  update(shown: Shown): void {
    this.#shown = shown;
    this.#draw();
  }

  take(record: StripRecord): void {
    const edges = this.#edges();
    if (edges && record.atMs > edges.startMs && record.atMs <= edges.endMs) {
      this.#records = withRecord(this.#records, record);
    }
  }

  #edges(): Edges | null {
    if (!this.#shown || !this.#date) return null;
    const { format } = this.#shown;
    return { startMs: format.noonMs(this.#date), endMs: format.noonMs(this.#date, 1) };
  }

  #draw(): void {
    const edges = this.#edges();
    if (!this.#shown || !edges) return;
    const { now, nowMs, format } = this.#shown;
    const width = this.#roll.clientWidth;
    const plan = edges.endMs > nowMs ? now.plan : null;
    const data = stripData({ ...edges, nowMs }, this.#records, plan, this.#thought);
    setText(this.#note, this.#records.length === 0 && nowMs >= edges.startMs ? words.empty : this.#message);
    if (!this.#table.hidden) this.#table.replaceChildren(stripTable(data, format, calendarDay(this.#date)));
    if (width === 0) return;
    const g = geometry(data, width, now.site.capacityKwh, format);
    this.#drawn = { data, g };
    this.#margin.replaceChildren(drawMargin(g, format));
    const stops = Array.from({ length: WINDOWS_WHEN_NARROW }, (_, i) =>
      h('span', { class: `stop stop-${i}` }),
    );
    this.#roll.replaceChildren(drawPaper(data, g, { format, reserveKwh: now.site.reserveKwh }), ...stops);
    this.#drawNames(this.#shown);
    this.#place(data, g, width);
    this.#drawReading();
  }

  #drawNames({ now, format }: Shown): void {
    const { lanes } = words;
    const texts = [
      lanes.price(now.site.currency),
      lanes.temperatures(format.temperatureUnit),
      lanes.ice(format.energyUnit),
      lanes.runs,
    ];
    const names = texts.map((text, i) => h('span', { class: `lane-name lane-${i}` }, text));
    this.#names.replaceChildren(...names);
  }

  /** Rolls long paper to the window that holds now, once for each night and width. */
  #place(data: StripData, g: Geometry, width: number): void {
    const place = `${this.#date} ${width}`;
    if (this.#placed === place || g.width <= width) return;
    this.#placed = place;
    const tonight = data.nowMs >= data.startMs && data.nowMs < data.endMs;
    const page = tonight ? Math.floor(g.x(data.nowMs) / width) : EVENING_WINDOW;
    this.#roll.scrollTo({ left: page * width, behavior: 'instant' });
  }

  #drawReading(): void {
    if (!this.#drawn || !this.#shown) return;
    const { data, g } = this.#drawn;
    const { format } = this.#shown;
    const atMs = within(data, this.#readMs ?? data.nowMs);
    const reading = readStrip(data, atMs);
    const x = g.x(atMs).toFixed(1);
    const line = this.#roll.querySelector('.reading-line');
    line?.setAttribute('x1', x);
    line?.setAttribute('x2', x);
    line?.classList.toggle('idle', this.#readMs === null);
    this.#row.replaceChildren(readingRow(reading, format, data.thought !== null));
    const minutes = (ms: number): string => String(Math.round((ms - data.startMs) / MINUTE_MS));
    this.#roll.setAttribute('aria-valuemin', '0');
    this.#roll.setAttribute('aria-valuemax', minutes(data.endMs));
    this.#roll.setAttribute('aria-valuenow', minutes(atMs));
    this.#roll.setAttribute('aria-valuetext', readingSentence(reading, format));
  }

  #moveTo(atMs: number | null): void {
    this.#readMs = atMs === null || !this.#drawn ? null : within(this.#drawn.data, atMs);
    this.#drawReading();
  }

  /** Moves to the next or last step of the table, and on by the rest of `ms`. */
  #moveBy(ms: number): void {
    if (!this.#drawn) return;
    const { data, g } = this.#drawn;
    const steps = within(data, this.#readMs ?? data.nowMs) / STEP_MS;
    this.#moveTo((ms > 0 ? Math.floor(steps) : Math.ceil(steps)) * STEP_MS + ms);
    const x = g.x(this.#readMs ?? data.nowMs);
    const { scrollLeft, clientWidth } = this.#roll;
    if (x < scrollLeft || x > scrollLeft + clientWidth) this.#roll.scrollLeft = x - clientWidth / 2;
  }

  #toggleTable(): void {
    const asTable = this.#table.hidden;
    this.#table.hidden = !asTable;
    this.#paper.hidden = asTable;
    this.#row.hidden = asTable;
    this.#tableButton.setAttribute('aria-pressed', String(asTable));
    this.#draw();
    (asTable ? this.#table : this.#roll).focus({ preventScroll: true });
  }

  async #toggleThought(): Promise<void> {
    const edges = this.#edges();
    this.#message = '';
    if (this.#thought || !edges) this.#thought = null;
    else {
      const span = `from=${instant(edges.startMs)}&to=${instant(edges.startMs + NOON_MS)}`;
      const plans = await read<PlanRecord[]>(`/api/plans?${span}`).catch(() => []);
      this.#thought = plans[0] ?? null;
      if (!this.#thought) this.#message = words.noThought;
    }
    this.#thoughtButton.setAttribute('aria-pressed', String(this.#thought !== null));
    this.#draw();
  }
}

const within = ({ startMs, endMs }: Edges, atMs: number): number => Math.min(Math.max(atMs, startMs), endMs);
