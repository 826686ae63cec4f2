/** The owner's wishes: a row of them while none holds; a countdown and a way to give it back while one does. */
import type { WishName } from '../../commands.ts';
import { change } from './api.ts';
import { button, h, setText } from './dom.ts';
import { countdown } from './format.ts';
import { PassphraseField, refusal } from './owner.ts';
import { strings } from './strings.ts';
import type { Shown, Tools } from './view.ts';
import { WishForm, type Duration } from './wish-form.ts';

const words = strings.wish;
const NAMES: readonly Exclude<WishName, 'none'>[] = ['cool-now', 'save-ice', 'make-ice', 'stand-down'];

export class Wishes {
  readonly element: HTMLElement;
  readonly #tools: Tools;
  readonly #heading = h('h2', { id: 'wishes-heading', tabindex: -1 }, words.heading);
  readonly #form = new WishForm((name, duration) => this.#send(name, duration));
  readonly #choose: HTMLElement;
  readonly #readOnly = h('p', {}, words.readOnly);
  readonly #problem = h('p', { class: 'caution', role: 'alert' });
  readonly #name = h('span');
  readonly #left = h('span', { role: 'timer', class: 'countdown' });
  readonly #passphrase = new PassphraseField('give-back-passphrase');
  readonly #giveBack = h(
    'form',
    {},
    this.#passphrase.element,
    h('p', {}, h('button', { type: 'submit', class: 'wish' }, words.giveBack)),
  );
  readonly #active = h(
    'div',
    {},
    h('p', { class: 'sentence' }, this.#name, ' ', this.#left, ', ', words.after),
    this.#giveBack,
  );
  readonly #signOut = button(words.signOut, {}, () => void this.#attempt(() => this.#leave()));
  #shown: Shown | null = null;

  constructor(tools: Tools) {
    this.#tools = tools;
    const choices = NAMES.map((name) => wishItem(name, () => this.#form.open(name)));
    const list = h('ul', { class: 'wishes' }, ...choices);
    this.#choose = h('div', {}, h('p', { class: 'quiet' }, words.intro), list, this.#form.element);
    this.element = h('section', { 'aria-labelledby': 'wishes-heading' }, this.#heading, this.#active);
    this.element.append(this.#choose, this.#readOnly, this.#problem, this.#signOut);
    this.#giveBack.addEventListener('submit', (event) => {
      event.preventDefault();
      void this.#attempt(() => this.#return());
    });
    window.setInterval(() => {
      if (tools.live.heldMs === null) this.#tick(tools.live.nowMs());
    }, 1000);
  }

  update(shown: Shown): void {
    this.#shown = shown;
    const { access, wish } = shown.now;
    const active = wish.name !== 'none' && wish.untilMs > shown.nowMs;
    this.#active.hidden = !active;
    this.#giveBack.hidden = !access.changes;
    this.#choose.hidden = !access.changes || active;
    this.#readOnly.hidden = access.changes;
    this.#signOut.hidden = !access.signedIn;
    this.#passphrase.update(access.signedIn);
    this.#form.update(shown);
    setText(this.#name, words.active(words.words[wish.name]));
    this.#tick(shown.nowMs);
  }

  #tick(nowMs: number): void {
    if (this.#shown) setText(this.#left, countdown(this.#shown.now.wish.untilMs - nowMs));
  }

  async #send(name: WishName, duration: Duration): Promise<void> {
    await change('/api/wish', { name, for: duration });
    await this.#tools.live.refresh();
    this.#heading.focus();
    if (!this.#shown) return;
    const until = this.#shown.format.clock(this.#shown.now.wish.untilMs);
    this.#tools.announce(words.taken(words.words[name], until));
  }

  async #return(): Promise<void> {
    await this.#passphrase.signIn();
    await change('/api/wish', { name: 'none' });
    await this.#tools.live.refresh();
    this.#heading.focus();
    this.#tools.announce(words.given);
  }

  async #leave(): Promise<void> {
    await change('/api/session', null, 'DELETE');
    await this.#tools.live.refresh();
    this.#heading.focus();
    this.#tools.announce(words.signedOut);
  }

  async #attempt(act: () => Promise<void>): Promise<void> {
    setText(this.#problem, '');
    try {
      await act();
    } catch (error) {
      setText(this.#problem, refusal(error));
    }
  }
}

function wishItem(name: WishName, open: () => void): HTMLElement {
  return h(
    'li',
    {},
    button(words.words[name], { class: 'wish', 'aria-describedby': `wish-${name}` }, open),
    h('span', { class: 'quiet', id: `wish-${name}` }, words.meaning[name]),
  );
}
