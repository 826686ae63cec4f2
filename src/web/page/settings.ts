/** What the owner may set for longer than a wish: who decides, and the comfort limit. */
import { STRATEGIES } from '../../commands.ts';
import { change } from './api.ts';
import { h, setText } from './dom.ts';
import { PassphraseField, refusal } from './owner.ts';
import { strings } from './strings.ts';
import type { Shown, Tools } from './view.ts';

const words = strings.plant;
/** The range of `comfort.limit` in the site file. */
const LIMIT_C = { low: 18, high: 32 };

export class Settings {
  readonly element: HTMLElement;
  readonly #tools: Tools;
  readonly #strategy = h(
    'select',
    { id: 'set-strategy' },
    ...STRATEGIES.map((name) => h('option', { value: name }, words.strategies[name])),
  );
  readonly #limit = h('input', { id: 'set-limit', type: 'number', step: 0.1, required: true });
  readonly #limitLabel = h('label', { for: 'set-limit' });
  readonly #passphrase = new PassphraseField('set-passphrase');
  readonly #outcome = h('p', { role: 'status' });
  readonly #readOnly = h('p', {}, strings.wish.readOnly);
  readonly #form = h(
    'form',
    {},
    h('p', { class: 'field' }, h('label', { for: 'set-strategy' }, words.strategy), this.#strategy),
    h('p', { class: 'field' }, this.#limitLabel, this.#limit),
    this.#passphrase.element,
    h('p', { class: 'tools' }, h('button', { type: 'submit' }, words.apply)),
    this.#outcome,
  );
  #shown: Shown | null = null;
  /** The state that the fields were last filled from; typed text is left alone until it changes. */
  #filled = '';

  constructor(tools: Tools) {
    this.#tools = tools;
    this.element = h('section', {}, h('h2', {}, words.settings), this.#form, this.#readOnly);
    this.#form.addEventListener('submit', (event) => {
      event.preventDefault();
      void this.#apply();
    });
  }

  update(shown: Shown): void {
    this.#shown = shown;
    const { now, format } = shown;
    this.#form.hidden = !now.access.changes;
    this.#readOnly.hidden = now.access.changes;
    this.#passphrase.update(now.access.signedIn);
    setText(this.#limitLabel, words.limit(format.temperatureUnit));
    const state = `${now.strategy} ${now.limitC} ${format.units}`;
    if (state === this.#filled) return;
    this.#filled = state;
    this.#strategy.value = now.strategy;
    this.#limit.min = format.temperatureNumber(LIMIT_C.low).toFixed(1);
    this.#limit.max = format.temperatureNumber(LIMIT_C.high).toFixed(1);
    this.#limit.value = format.temperatureNumber(now.limitC).toFixed(1);
  }

  async #apply(): Promise<void> {
    if (!this.#shown) return;
    const { now, format } = this.#shown;
    const strategy = this.#strategy.value;
    const limitC = Number(format.typedTemperatureC(Number(this.#limit.value)).toFixed(2));
    try {
      await this.#passphrase.signIn();
      if (strategy !== now.strategy) await change('/api/strategy', { strategy });
      if (Math.abs(limitC - now.limitC) > 0.04) await change('/api/limit', { limitC });
      await this.#tools.live.refresh();
      setText(this.#outcome, words.applied);
    } catch (error) {
      setText(this.#outcome, refusal(error));
    }
  }
}
