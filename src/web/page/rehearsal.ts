/** Rehearsal: its place, and honestly what it will need. */
import { h, setText } from './dom.ts';
import { strings } from './strings.ts';
import type { View } from './view.ts';

const words = strings.rehearsal;

export function createRehearsal(): View {
  const needs = h('p', { class: 'sentence' });
  const heads = [words.row, words.run, words.tried, words.difference];
  const rows = words.rows.map((name) =>
    h('tr', {}, h('th', { scope: 'row' }, name), ...heads.slice(1).map(() => h('td', {}, strings.none))),
  );
  const table = h(
    'table',
    {},
    h('caption', {}, words.caption),
    h('thead', {}, h('tr', {}, ...heads.map((head) => h('th', { scope: 'col' }, head)))),
    h('tbody', {}, ...rows),
  );
  const region = h('div', { class: 'wide', tabindex: 0, role: 'region', 'aria-label': words.caption }, table);
  const intro = h('p', { class: 'sentence' }, words.intro);
  const notYet = h('p', { class: 'sentence' }, words.notYet);
  return {
    element: h('div', {}, h('h1', {}, words.heading), intro, notYet, needs, region),
    title: strings.views.rehearsal,
    night: null,
    update: ({ now }) => setText(needs, words.needs(now.nightsClosed)),
  };
}
