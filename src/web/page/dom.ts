/** Building elements without markup in strings: nothing that a record carries can become code. */
export type Child = Node | string | null;
export type Attributes = Readonly<Record<string, string | number | boolean | null>>;

function fill(element: Element, attributes: Attributes, children: readonly Child[]): void {
  for (const [name, value] of Object.entries(attributes)) {
    if (value === null || value === false) continue;
    element.setAttribute(name, value === true ? '' : String(value));
  }
  element.append(...children.filter((child) => child !== null));
}

export function h<K extends keyof HTMLElementTagNameMap>(
  tag: K,
  attributes: Attributes = {},
  ...children: readonly Child[]
): HTMLElementTagNameMap[K] {
  const element = document.createElement(tag);
  fill(element, attributes, children);
  return element;
}

export function svg<K extends keyof SVGElementTagNameMap>(
  tag: K,
  attributes: Attributes = {},
  ...children: readonly Child[]
): SVGElementTagNameMap[K] {
  const element = document.createElementNS('http://www.w3.org/2000/svg', tag);
  fill(element, attributes, children);
  return element;
}

export function button(label: string, attributes: Attributes, act: () => void): HTMLButtonElement {
  const element = h('button', { type: 'button', ...attributes }, label);
  element.addEventListener('click', act);
  return element;
}

/** A figure that carries its unrounded value in SI for machines, and reads as the text for people. */
export function figure(value: number | null, text: string): HTMLElement {
  return value === null ? h('span', {}, text) : h('data', { value }, text);
}

/** Rewrites an element's text only when it differs, so that screen readers and selections are left in peace. */
export function setText(element: Element, text: string): void {
  if (element.textContent !== text) element.textContent = text;
}
