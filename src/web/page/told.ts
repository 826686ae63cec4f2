/** Telling rimehold what only the owner's eyes know of the bank: what it will do, confirm, and take back within the hour. */
import type { Told } from '../../commands.ts';
import { change } from './api.ts';
import { button, h, setText } from './dom.ts';
import { PassphraseField, refusal } from './owner.ts';
import { strings } from './strings.ts';
import type { Shown, Tools } from './view.ts';

const words = strings.told;
const NAMES: readonly Told[] = ['empty', 'full', 'tank-refilled', 'probe-moved'];
/** Probes that stand in the bank's water. */
const IN_WATER = /^(leaving-water|entering-water|bank-(top|middle|bottom))$/;

export class Telling {
  readonly element: HTMLElement;
  readonly #tools: Tools;
  readonly #heading = h('h2', { id: 'told-heading', tabindex: -1 }, words.heading);
  readonly #choose: HTMLElement;
  readonly #ask = h('h3', { tabindex: -1 });
  readonly #effect = h('p', { class: 'sentence' });
  readonly #probe = h('select', { id: 'told-probe' });
  readonly #probeField = h(
    'p',
    { class: 'field' },
    h('label', { for: 'told-probe' }, words.probe),
    this.#probe,
  );
  readonly #passphrase = new PassphraseField('told-passphrase');
  readonly #problem = h('p', { class: 'caution', role: 'alert' });
  readonly #form: HTMLFormElement;
  readonly #was = h('p', { class: 'sentence' });
  readonly #backPassphrase = new PassphraseField('take-back-passphrase');
  readonly #backProblem = h('p', { class: 'caution', role: 'alert' });
  readonly #back: HTMLFormElement;
  readonly #readOnly = h('p', {}, strings.wish.readOnly);
  #what: Told = 'empty';
  #probes = '';
  #opener: Element | null = null;

  constructor(tools: Tools) {
    this.#tools = tools;
    const items = NAMES.map((what) => this.#item(what));
    this.#choose = h(
      'div',
      {},
      h('p', { class: 'quiet' }, words.intro),
      h('ul', { class: 'wishes' }, ...items),
    );
    const confirm = h('button', { type: 'submit', class: 'wish' }, words.confirm);
    const cancel = button(strings.wish.cancel, {}, () => this.#close());
    const asked = [this.#ask, this.#effect, this.#probeField, this.#passphrase.element, this.#problem];
    this.#form = h(
      'form',
      { class: 'asking', hidden: true },
      ...asked,
      h('p', { class: 'tools' }, confirm, cancel),
    );
    const takeBack = h('p', {}, h('button', { type: 'submit', class: 'wish' }, words.takeBack));
    this.#back = h('form', {}, this.#was, this.#backPassphrase.element, this.#backProblem, takeBack);
    this.element = h(
      'section',
      { 'aria-labelledby': 'told-heading' },
      this.#heading,
      this.#back,
      this.#choose,
    );
    this.element.append(this.#form, this.#readOnly);
    this.#form.addEventListener('keydown', (event) => {
      if (event.key === 'Escape') this.#close();
    });
    onSubmit(this.#form, this.#problem, () => this.#tell());
    onSubmit(this.#back, this.#backProblem, () => this.#takeBack());
  }

  update({ now, format }: Shown): void {
    const { told, access } = now;
    this.#readOnly.hidden = access.changes;
    this.#choose.hidden = !access.changes;
    this.#back.hidden = !access.changes || told === null;
    this.#passphrase.update(access.signedIn);
    this.#backPassphrase.update(access.signedIn);
    if (told !== null) {
      const change = words.change(format.energy(told.beforeKwh), format.energy(told.afterKwh));
      const what = told.point === null ? words.names[told.what] : words.moved(told.point);
      setText(this.#was, words.was(format.clock(told.atMs), what, change, format.clock(told.untilMs)));
    }
    const probes = now.points.map(({ point }) => point).filter((point) => IN_WATER.test(point));
    if (this.#probes === probes.join()) return;
    this.#probes = probes.join();
    const any = h('option', { value: '' }, words.anyProbe);
    this.#probe.replaceChildren(...probes.map((point) => h('option', { value: point }, point)), any);
  }

  #item(what: Told): HTMLElement {
    const open = button(words.names[what], { class: 'wish', 'aria-describedby': `told-${what}` }, () =>
      this.#open(what),
    );
    return h('li', {}, open, h('span', { class: 'quiet', id: `told-${what}` }, words.when[what]));
  }

  #open(what: Told): void {
    this.#what = what;
    this.#opener = document.activeElement;
    setText(this.#ask, words.names[what]);
    setText(this.#effect, words.effect[what]);
    setText(this.#problem, '');
    this.#probeField.hidden = what !== 'probe-moved';
    this.#form.hidden = false;
    this.#ask.focus();
  }

  #close(): void {
    this.#form.hidden = true;
    if (this.#opener instanceof HTMLElement) this.#opener.focus();
  }

  async #tell(): Promise<void> {
    await this.#passphrase.signIn();
    const point =
      this.#what === 'probe-moved' && this.#probe.value !== '' ? { point: this.#probe.value } : {};
    await change('/api/told', { what: this.#what, ...point });
    await this.#tools.live.refresh();
    this.#form.hidden = true;
    this.#heading.focus();
    this.#tools.announce(this.#was.textContent);
  }

  async #takeBack(): Promise<void> {
    await this.#backPassphrase.signIn();
    await change('/api/told', { what: 'nothing' });
    await this.#tools.live.refresh();
    this.#heading.focus();
    this.#tools.announce(words.takenBack);
  }
}

function onSubmit(form: HTMLFormElement, problem: HTMLElement, act: () => Promise<void>): void {
  form.addEventListener('submit', (event) => {
    event.preventDefault();
    setText(problem, '');
    act().catch((error: unknown) => setText(problem, refusal(error)));
  });
}
