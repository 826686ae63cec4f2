/** The owner's passphrase: asked for where a change is made, once for a session, never kept in the page. */
import { change } from './api.ts';
import { h } from './dom.ts';
import { strings } from './strings.ts';

export class PassphraseField {
  readonly element: HTMLElement;
  readonly #input: HTMLInputElement;

  constructor(id: string) {
    const attributes = { type: 'password', autocomplete: 'current-password', required: true, size: 24 };
    this.#input = h('input', { id, ...attributes });
    // Password managers file a passphrase under a name; there is only one owner.
    const owner = h('input', {
      type: 'text',
      autocomplete: 'username',
      value: 'owner',
      readonly: true,
      hidden: true,
    });
    this.element = h(
      'p',
      { class: 'field' },
      h('label', { for: id }, strings.wish.passphrase),
      owner,
      this.#input,
    );
  }

  /** Shows the field only while it is needed. */
  update(signedIn: boolean): void {
    this.element.hidden = signedIn;
    this.#input.required = !signedIn;
  }

  /** Opens a session when a passphrase was typed. Throws `ApiProblem`. */
  async signIn(): Promise<void> {
    if (this.#input.value === '') return;
    await change('/api/session', { passphrase: this.#input.value });
    this.#input.value = '';
  }
}

/** The sentence of whatever went wrong. */
export const refusal = (error: unknown): string =>
  strings.wish.refused(error instanceof Error ? error.message : String(error));
