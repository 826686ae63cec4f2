/** Asking for a wish: for how long, what it will cost, confirm. */
import type { WishName } from '../../commands.ts';
import type { WishPreview } from '../source.ts';
import { read } from './api.ts';
import { button, h, setText } from './dom.ts';
import type { Format } from './format.ts';
import { PassphraseField, refusal } from './owner.ts';
import { strings } from './strings.ts';
import type { Shown } from './view.ts';

const words = strings.wish;
/** ISO 8601. */
export type Duration = keyof typeof words.durations;
/** Below two hundredths an amount says nothing: the estimate of ice alone is coarser. */
const NOTHING = 0.02;

export class WishForm {
  readonly element: HTMLFormElement;
  readonly #heading = h('h3', { tabindex: -1 });
  readonly #select = h(
    'select',
    { id: 'wish-duration' },
    ...Object.entries(words.durations).map(([value, text]) =>
      h('option', { value, selected: value === 'PT1H' }, text),
    ),
  );
  readonly #cost = h('p', { class: 'sentence', 'aria-live': 'polite' });
  readonly #problem = h('p', { class: 'caution', role: 'alert' });
  readonly #passphrase = new PassphraseField('wish-passphrase');
  readonly #confirm = h('button', { type: 'submit', class: 'wish' });
  readonly #send: (name: WishName, duration: Duration) => Promise<void>;
  #name: WishName = 'none';
  #opener: Element | null = null;
  #format: Format | null = null;

  constructor(send: (name: WishName, duration: Duration) => Promise<void>) {
    this.#send = send;
    const cancel = button(words.cancel, {}, () => this.#close());
    const field = h(
      'p',
      { class: 'field' },
      h('label', { for: 'wish-duration' }, words.duration),
      this.#select,
    );
    const tools = h('p', { class: 'tools' }, this.#confirm, cancel);
    const parts = [this.#heading, field, this.#cost, this.#passphrase.element, this.#problem, tools];
    this.element = h('form', { class: 'asking', hidden: true }, ...parts);
    this.#select.addEventListener('change', () => void this.#preview());
    this.element.addEventListener('keydown', (event) => {
      if (event.key === 'Escape') this.#close();
    });
    this.element.addEventListener('submit', (event) => {
      event.preventDefault();
      void this.#submit();
    });
  }

  open(name: WishName): void {
    this.#name = name;
    this.#opener = document.activeElement;
    setText(this.#heading, words.ask(words.words[name]));
    setText(this.#confirm, words.confirm(words.words[name]));
    setText(this.#problem, '');
    this.element.hidden = false;
    this.#heading.focus();
    void this.#preview();
  }

  update({ now, format }: Shown): void {
    this.#format = format;
    this.#passphrase.update(now.access.signedIn);
  }

  #duration(): Duration {
    // oxlint-disable-next-line typescript/no-unsafe-type-assertion -- the options are the keys of `durations`
    return this.#select.value as Duration;
  }

  #close(): void {
    this.element.hidden = true;
    if (this.#opener instanceof HTMLElement) this.#opener.focus();
  }

  /** Shows the cost; an answer that comes after another was asked for is let go. */
  async #preview(): Promise<void> {
    const query = `name=${this.#name}&for=${this.#duration()}`;
    setText(this.#cost, words.costing);
    const text = await read<WishPreview>(`/api/wish?${query}`).then(
      (preview) => costSentence(preview, this.#format),
      (error: unknown) => refusal(error),
    );
    if (query === `name=${this.#name}&for=${this.#duration()}`) setText(this.#cost, text);
  }

  async #submit(): Promise<void> {
    setText(this.#problem, '');
    try {
      await this.#passphrase.signIn();
      await this.#send(this.#name, this.#duration());
      this.element.hidden = true;
    } catch (error) {
      setText(this.#problem, refusal(error));
    }
  }
}

export function costSentence({ sentence, costMoney, coolsLess }: WishPreview, format: Format | null): string {
  if (costMoney === null || !format) return sentence;
  const money = format.money(Math.abs(costMoney));
  if (Math.abs(costMoney) < NOTHING) return `${sentence} ${coolsLess ? words.freeWarm : words.free}`;
  if (costMoney > 0) return `${sentence} ${words.cost(money)}`;
  return `${sentence} ${coolsLess ? words.savesWarm(money) : words.saves(money)}`;
}
