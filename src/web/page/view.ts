/** What a sheet of the page is, and what it is given. */
import type { NowAnswer } from '../source.ts';
import type { Format } from './format.ts';
import type { Live } from './live.ts';

export interface Shown {
  readonly now: NowAnswer;
  /** The daemon's time, or the time at which the viewer holds the page still. */
  readonly nowMs: number;
  readonly format: Format;
}

export interface Tools {
  readonly live: Live;
  /** Says something to screen readers, politely. */
  announce(text: string): void;
}

export interface View {
  readonly element: HTMLElement;
  /** For the title block and the window. */
  readonly title: string;
  /** Date of the night that the sheet is about; null for tonight. */
  readonly night: string | null;
  /** Called with every change; must leave focus and typed text alone. */
  update(shown: Shown): void;
}
