/** What stands round every sheet: its tabs, the title block of a drawing, the cautions, the viewer's units. */
import type { DisplayUnits } from '../../units.ts';
import { button, h, setText } from './dom.ts';
import { calendarDay } from './format.ts';
import { strings } from './strings.ts';
import type { Shown, Tools, View } from './view.ts';

export type ViewName = keyof typeof strings.views;
const VIEWS: readonly ViewName[] = ['tonight', 'nights', 'rehearsal', 'plant'];

export interface Frame {
  readonly main: HTMLElement;
  update(shown: Shown, name: ViewName, view: View): void;
  announce(text: string): void;
}

const UNITS_KEY = 'rimehold-units';

/** The viewer's own choice of units; null follows the site. A browser that keeps nothing follows the site too. */
export function viewerUnits(): DisplayUnits | null {
  try {
    const kept = localStorage.getItem(UNITS_KEY);
    return kept === 'SI' || kept === 'IP' ? kept : null;
  } catch {
    return null;
  }
}

function keepUnits(units: string): void {
  try {
    if (units === '') localStorage.removeItem(UNITS_KEY);
    else localStorage.setItem(UNITS_KEY, units);
  } catch {
    // A browser without storage shows the site's units; nothing else depends on it.
  }
}

export function createFrame(body: HTMLElement, tools: Pick<Tools, 'live'>, unitsChanged: () => void): Frame {
  const main = h('main', { id: 'sheet', tabindex: -1 });
  const status = h('div', { class: 'unseen', role: 'status' });
  const tabs = VIEWS.map((view) => ({ view, link: h('a', { href: `#/${view}` }, strings.views[view]) }));
  const nav = h(
    'nav',
    { 'aria-label': strings.viewsLabel },
    h('ul', {}, ...tabs.map(({ link }) => h('li', {}, link))),
  );
  const block = createTitleBlock();
  const held = h('p', { class: 'caution' });
  const still = button(strings.hold, { 'aria-pressed': 'false' }, () =>
    tools.live.hold(tools.live.heldMs === null),
  );
  const cautions = h('ul', { class: 'cautions' });
  const units = createUnits(unitsChanged);
  const skip = h('a', { class: 'skip', href: '#sheet' }, strings.skip);
  skip.addEventListener('click', (event) => {
    // The address belongs to the sheets: going to the main part must not change it.
    event.preventDefault();
    main.focus();
  });
  const header = h('header', {}, h('p', { class: 'mark' }, strings.product), nav, block.element);
  const footer = h('footer', {}, h('p', { class: 'tools' }, still, units.element), held, cautions);
  body.replaceChildren(skip, header, main, footer, status);
  return {
    main,
    announce: (text) => setText(status, text),
    update({ now, format }, name, view) {
      document.title = strings.title(view.title, now.site.name);
      for (const tab of tabs) {
        if (tab.view === name) tab.link.setAttribute('aria-current', 'page');
        else tab.link.removeAttribute('aria-current');
      }
      const { heldMs } = tools.live;
      still.setAttribute('aria-pressed', String(heldMs !== null));
      setText(held, heldMs === null ? '' : strings.heldAt(format.clock(heldMs)));
      if (cautions.children.length !== now.cautions.length) {
        cautions.replaceChildren(...now.cautions.map((caution) => h('li', {}, caution)));
      }
      units.update(now.site.units);
      block.update({ now, format }, view);
    },
  };
}

function createTitleBlock(): {
  element: HTMLElement;
  update(shown: Pick<Shown, 'now' | 'format'>, view: View): void;
} {
  const words = strings.block;
  const names = [words.site, words.night, words.sheet, words.issued, words.clock, words.revision];
  const cells = names.map(() => h('dd'));
  const element = h(
    'dl',
    { class: 'title-block' },
    ...names.map((name, i) => h('div', {}, h('dt', {}, name), cells[i])),
  );
  return {
    element,
    update({ now, format }, view) {
      const { record } = now;
      const texts = [
        now.site.name,
        calendarDay(view.night ?? now.night.date),
        view.title,
        record ? format.clock(record.atMs) : words.notYet,
        now.health.clock.state === 'set' ? words.clockSet : words.clockDoubtful,
        now.site.revision,
      ];
      texts.forEach((text, i) => setText(cells[i], text));
    },
  };
}

function createUnits(changed: () => void): { element: HTMLElement; update(site: DisplayUnits): void } {
  const own = h('option', { value: '' });
  const select = h(
    'select',
    { id: 'units' },
    own,
    h('option', { value: 'SI' }, strings.unitsSI),
    h('option', { value: 'IP' }, strings.unitsIP),
  );
  select.value = viewerUnits() ?? '';
  select.addEventListener('change', () => {
    keepUnits(select.value);
    changed();
  });
  return {
    element: h('span', {}, h('label', { for: 'units' }, strings.units), ' ', select),
    update: (site) => setText(own, strings.unitsSite(site)),
  };
}
