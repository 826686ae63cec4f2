/** One night: its strip, and its printable sheet inside the page. */
import { h, setText } from './dom.ts';
import { calendarDay } from './format.ts';
import { Strip } from './strip.ts';
import { strings } from './strings.ts';
import type { Shown, View } from './view.ts';

const words = strings.nights;

export class Sheet implements View {
  readonly title = words.title;
  readonly night: string;
  readonly element: HTMLElement;
  readonly #links: HTMLElement;
  readonly #strip = new Strip();
  readonly #missing = h('p', { class: 'sentence', role: 'status' });
  readonly #paper = h('div', { class: 'sheet' });
  #loaded = false;

  constructor(date: string) {
    this.night = date;
    const heading = words.sheet(calendarDay(date));
    this.#links = h(
      'span',
      { class: 'tools' },
      h('a', { href: `/nights/${date}`, target: '_blank', rel: 'noopener' }, words.print),
      h('a', { href: `/api/nights/${date}` }, words.json),
    );
    const tools = h('p', { class: 'tools' }, h('a', { href: '#/nights' }, words.back), this.#links);
    const parts = [h('h1', {}, heading), tools, this.#strip.element, this.#missing, this.#paper];
    this.element = h('div', {}, ...parts);
  }

  update(shown: Shown): void {
    this.#strip.update(shown);
    if (this.#loaded) return;
    this.#loaded = true;
    this.#strip.show(this.night).catch(() => {
      this.#loaded = false;
    });
    void this.#load();
  }

  async #load(): Promise<void> {
    const src = `/nights/${this.night}`;
    const found = await fetch(src, { method: 'HEAD' }).then(
      ({ ok }) => ok,
      () => false,
    );
    this.#links.hidden = !found;
    setText(this.#missing, found ? '' : words.missing(calendarDay(this.night)));
    if (!found) return;
    // The sheet has no scripts and may run none; the same origin lets this page give the frame the sheet's height.
    const frame = h('iframe', {
      src,
      title: words.sheet(calendarDay(this.night)),
      sandbox: 'allow-same-origin',
    });
    frame.addEventListener('load', () => {
      const height = frame.contentDocument?.documentElement.scrollHeight ?? 0;
      if (height > 0) frame.style.height = `${height + 2}px`;
    });
    this.#paper.replaceChildren(frame);
  }
}
