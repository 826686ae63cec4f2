/** START HERE for the page: what is known (live), which sheet is open (the address), and drawing one by the other. */
import { h } from './dom.ts';
import { createFormat, type Format } from './format.ts';
import { createFrame, viewerUnits, type ViewName } from './frame.ts';
import { Live } from './live.ts';
import { Nights } from './nights.ts';
import { createPlant } from './plant.ts';
import { createRehearsal } from './rehearsal.ts';
import { Sheet } from './sheet.ts';
import { strings } from './strings.ts';
import { Tonight } from './tonight.ts';
import type { Shown, Tools, View } from './view.ts';

/** Ages and staleness go on even when nothing is heard. */
const TICK_MS = 5000;

const live = new Live();
const frame = createFrame(document.body, { live }, () => redraw());
const tools: Tools = { live, announce: (text) => frame.announce(text) };
const views = new Map<string, View>();

let formatKey = '';
let format: Format | null = null;

function formatOf(now: Shown['now']): Format {
  const units = viewerUnits() ?? now.site.units;
  const key = `${units} ${now.site.currency} ${now.zoneOffsets.at(-1)?.fromMs} ${now.zoneOffsets.length}`;
  if (!format || key !== formatKey) {
    format = createFormat({ units, currency: now.site.currency, offsets: now.zoneOffsets });
    formatKey = key;
  }
  return format;
}

interface Route {
  readonly name: ViewName;
  /** Date of a night sheet, or null. */
  readonly date: string | null;
}

function route(): Route {
  const [, name = '', date = null] = location.hash.split('/');
  if (name === 'nights' && date !== null && /^\d{4}-\d{2}-\d{2}$/.test(date)) return { name, date };
  return {
    name: name === 'nights' || name === 'rehearsal' || name === 'plant' ? name : 'tonight',
    date: null,
  };
}

const CREATE: Readonly<Record<ViewName, (tools: Tools) => View>> = {
  tonight: (given) => new Tonight(given),
  nights: (given) => new Nights(given),
  rehearsal: createRehearsal,
  plant: createPlant,
};

/** Views are kept: going back finds them as they were left. Sheets of single nights are made anew. */
function viewOf({ name, date }: Route): View {
  if (date !== null) return new Sheet(date);
  const view = views.get(name) ?? CREATE[name](tools);
  views.set(name, view);
  return view;
}

let open: { route: Route; view: View } | null = null;

function redraw(): void {
  const { now } = live;
  if (!now) {
    const text = live.failure ? strings.failed(live.failure) : strings.opening;
    frame.main.replaceChildren(h('p', { class: 'sentence', role: 'status' }, text));
    return;
  }
  const wanted = route();
  if (!open || open.route.name !== wanted.name || open.route.date !== wanted.date) {
    open = { route: wanted, view: viewOf(wanted) };
    frame.main.replaceChildren(open.view.element);
  } else if (!open.view.element.isConnected) frame.main.replaceChildren(open.view.element);
  const shown: Shown = { now, nowMs: live.heldMs ?? live.nowMs(), format: formatOf(now) };
  document.body.classList.toggle('stale', live.stale() !== null);
  open.view.update(shown);
  frame.update(shown, wanted.name, open.view);
}

window.addEventListener('hashchange', () => {
  if (location.hash !== '' && !location.hash.startsWith('#/')) return;
  redraw();
  window.scrollTo(0, 0);
  frame.main.focus({ preventScroll: true });
});
live.onChange(redraw);
window.setInterval(() => {
  if (live.heldMs === null) redraw();
}, TICK_MS);
redraw();
live.start();
