/** Tonight: the answer, what needs attention, the figures, the strip, the wishes. */
import { answer } from './answer.ts';
import { button, h, setText } from './dom.ts';
import { figureRow } from './figure-row.ts';
import { calendarDay, shiftDate } from './format.ts';
import { notices, type Notice } from './notices.ts';
import { Strip } from './strip.ts';
import { strings } from './strings.ts';
import type { Shown, Tools, View } from './view.ts';
import { Wishes } from './wishes.ts';

export class Tonight implements View {
  readonly title = strings.views.tonight;
  readonly night = null;
  readonly element: HTMLElement;
  readonly #tools: Tools;
  readonly #headline = h('h1', { class: 'answer' });
  readonly #why = h('p', { class: 'sentence' });
  readonly #asides = h('p', { class: 'sentence' });
  readonly #uncertain = h('p', { class: 'sentence quiet' });
  readonly #list = h('ul', { class: 'notices' });
  readonly #attention = h('section', { 'aria-label': strings.notices.label, hidden: true }, this.#list);
  readonly #figures = h('section', { class: 'figures', 'aria-label': strings.figures.label });
  readonly #heading = h('h2');
  readonly #back = button(strings.strip.tonight, {}, () => this.#go(0));
  readonly #after = button(strings.strip.after, {}, () => this.#go(1));
  readonly #strip = new Strip();
  readonly #wishes: Wishes;
  #shown: Shown | null = null;
  /** The night that the viewer turned to; null follows tonight. */
  #date: string | null = null;
  #loaded = '';
  #drawn = '';
  #said = '';

  constructor(tools: Tools) {
    this.#tools = tools;
    this.#wishes = new Wishes(tools);
    const before = button(strings.strip.before, {}, () => this.#go(-1));
    const steps = h('p', { class: 'tools' }, before, this.#back, this.#after);
    const night = h('section', {}, h('div', { class: 'heading' }, this.#heading, steps), this.#strip.element);
    const opening = [
      this.#headline,
      this.#why,
      this.#asides,
      this.#uncertain,
      this.#attention,
      this.#figures,
    ];
    this.element = h('div', {}, ...opening, night, this.#wishes.element);
    tools.live.onRecord((record) => this.#strip.take(record));
  }

  update(shown: Shown): void {
    this.#shown = shown;
    const { now, nowMs, format } = shown;
    this.#strip.update(shown);
    this.#showNight(shown);
    const words = answer(now, nowMs, format);
    setText(this.#headline, words.headline);
    setText(this.#why, words.why);
    setText(this.#asides, words.asides);
    this.#asides.hidden = words.asides === '';
    setText(this.#uncertain, words.uncertain);
    this.#attend(shown);
    this.#figures.hidden = !now.record;
    if (now.record) this.#figures.replaceChildren(figureRow(now.record, format));
    this.#wishes.update(shown);
  }

  #go(days: number): void {
    if (!this.#shown) return;
    const tonight = this.#shown.now.night.date;
    const next = days === 0 ? tonight : shiftDate(this.#date ?? tonight, days);
    this.#date = next === tonight ? null : next;
    this.#showNight(this.#shown);
  }

  #showNight({ now }: Shown): void {
    const tonight = now.night.date;
    const wanted = this.#date ?? tonight;
    this.#back.setAttribute('aria-current', String(this.#date === null));
    this.#after.disabled = wanted > tonight;
    setText(this.#heading, strings.strip.heading(calendarDay(wanted)));
    if (this.#loaded === wanted) return;
    this.#loaded = wanted;
    this.#strip.show(wanted).catch(() => {
      this.#loaded = '';
    });
  }

  /** Draws the notices; says it aloud when the command or a notice is another than before. */
  #attend({ now, nowMs, format }: Shown): void {
    const found = notices(now, this.#tools.live.stale(), nowMs, format);
    const text = found.map(({ what, todo }) => `${what} ${todo}`.trim()).join(' ');
    this.#attention.hidden = found.length === 0;
    if (text !== this.#drawn) {
      this.#drawn = text;
      this.#list.replaceChildren(...found.map(noticeItem));
    }
    const state = `${now.record?.command} ${found.map(({ kind }) => kind).join(' ')}`;
    if (this.#said !== '' && this.#said !== state)
      this.#tools.announce(`${this.#why.textContent} ${text}`.trim());
    this.#said = state;
  }
}

const noticeItem = ({ what, todo }: Notice): HTMLElement => h('li', {}, h('strong', {}, what), ' ', todo);
