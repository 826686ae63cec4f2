/** The words for what the plant may be told, what it does, who decides and what an owner may wish. */

export const COMMANDS = ['hold', 'charge-now', 'discharge', 'charge-and-discharge'] as const;
export type Command = (typeof COMMANDS)[number];

/** The trade's operating modes of a cool store, as observed from powers and flows. */
export const MODES = [
  'idle',
  'charging',
  'discharging',
  'charging-while-discharging',
  'direct-cooling',
] as const;
export type Mode = (typeof MODES)[number];

export const STRATEGIES = ['planned', 'storage-priority', 'chiller-priority', 'timetable'] as const;
export type Strategy = (typeof STRATEGIES)[number];

export const WISHES = ['none', 'cool-now', 'save-ice', 'make-ice', 'stand-down'] as const;
export type WishName = (typeof WISHES)[number];

/** An owner's wish; it gives itself back at `untilMs`. */
export interface Wish {
  readonly name: WishName;
  readonly untilMs: number;
}

/** What only the owner's eyes can know of the bank; the estimate takes it as a fact. */
export const TOLD = ['empty', 'full', 'tank-refilled', 'probe-moved'] as const;
export type Told = (typeof TOLD)[number];

export const PHASES = ['all-water', 'mixed', 'full'] as const;
export type Phase = (typeof PHASES)[number];

export const charges = (command: Command): boolean =>
  command === 'charge-now' || command === 'charge-and-discharge';
export const discharges = (command: Command): boolean =>
  command === 'discharge' || command === 'charge-and-discharge';

/** The command that makes ice, melts ice, both or neither. */
export function commandFor(charge: boolean, discharge: boolean): Command {
  if (charge) return discharge ? 'charge-and-discharge' : 'charge-now';
  return discharge ? 'discharge' : 'hold';
}
