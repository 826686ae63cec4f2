/** The evening strip in characters: price, ice on hand and what ran over one axis, noon to noon. */
import { parseInstant } from '../time.ts';
import type { Display } from './display.ts';
import type { NightSheet } from './night-schema.ts';
import { padEnd } from './paper.ts';
import { formatInstant } from '../time.ts';

const LABEL = 8;
/** Quarter hours in a character: 24 h in quarter hours are 96, so 72 columns hold a night of 24 h at 20 min each. */
const COLUMNS = 72;
const BLOCKS = ['▁', '▂', '▃', '▄', '▅', '▆', '▇', '█'] as const;
const RUNS = {
  idle: ' ',
  charging: '/',
  discharging: '.',
  'charging-while-discharging': 'x',
  'direct-cooling': '=',
} as const;

export function stripOf(sheet: NightSheet, show: Display): string[] {
  const { trace } = sheet;
  const count = trace.mode.length;
  const at = (column: number): number => Math.min(count - 1, Math.floor(((column + 0.5) * count) / COLUMNS));
  const lane = (label: string, draw: (index: number) => string): string =>
    padEnd(label, LABEL) + Array.from({ length: COLUMNS }, (_, column) => draw(at(column))).join('');
  const ice = scale(trace.iceKwh, true);
  const price = scale(trace.price, false);
  return [
    lane('price', (index) => price(trace.price[index])),
    lane('ice', (index) => ice(trace.iceKwh[index])),
    lane('ran', (index) => {
      const mode = trace.mode[index];
      return mode === null ? '?' : RUNS[mode];
    }),
    padEnd('', LABEL) + axis(sheet, show),
    padEnd('', LABEL) + '/ charging   . discharging   x both   = direct cooling   ? not recorded',
  ];
}

/** Eight heights between the least (or zero) and the greatest; a blank where nothing is known. */
function scale(values: readonly (number | null)[], fromZero: boolean): (value: number | null) => string {
  const known = values.filter((value) => value !== null);
  const low = fromZero ? Math.min(0, ...known) : Math.min(...known);
  const high = Math.max(...known);
  return (value) => {
    if (value === null) return ' ';
    const share = high > low ? (value - low) / (high - low) : 0;
    return BLOCKS[Math.min(7, Math.max(0, Math.floor(share * 8)))];
  };
}

/** Hours every three hours of the night, written at their place. */
function axis(sheet: NightSheet, show: Display): string {
  const { trace } = sheet;
  const startMs = parseInstant(trace.start) ?? 0;
  const lengthMs = trace.stepMs * trace.mode.length;
  const cells = Array.from({ length: COLUMNS }, () => ' ');
  let free = 0;
  for (let column = 0; column <= COLUMNS - 5; column++) {
    const atMs = startMs + Math.round(((column / COLUMNS) * lengthMs) / trace.stepMs) * trace.stepMs;
    const clock = show.clock(formatInstant(atMs));
    const [hour, minute] = clock.split(':').map(Number);
    if (minute !== 0 || hour % 3 !== 0 || column < free) continue;
    for (const [offset, letter] of clock.split('').entries()) cells[column + offset] = letter;
    free = column + 6;
  }
  return cells.join('');
}
