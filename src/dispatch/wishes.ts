/** What the room and its owner change in a request, before the interlocks see it. */
import { charges, commandFor, discharges, type Command, type Wish } from '../commands.ts';

/** The wish that holds now; one that has run out has given itself back. */
export function wishNow(wish: Wish | null, nowMs: number): Wish | null {
  return wish !== null && wish.name !== 'none' && nowMs < wish.untilMs ? wish : null;
}

/** The command that a wish makes of what was asked. */
export function withWish(asked: Command, wish: Wish | null): Command {
  switch (wish?.name) {
    case 'cool-now':
      return commandFor(charges(asked), true);
    case 'save-ice':
      return commandFor(charges(asked), false);
    case 'make-ice':
      return commandFor(true, discharges(asked));
    case 'stand-down':
      return 'hold';
    default:
      return asked;
  }
}

/** Half width of the band round the room's set point in which delivery keeps doing what it does. */
const BAND_K = 0.25;
/** How far under the comfort limit the set point lies, so that the band stays below the limit. */
export const SET_POINT_UNDER_LIMIT_K = 0.4;

/**
 * Whether a room that may be cooled wants it now: on above the band, off below it, else as before.
 * Without a room temperature the answer is yes: a blind room is cooled rather than left hot.
 */
export function roomWantsCooling(roomC: number | null, limitC: number, delivering: boolean): boolean {
  if (roomC === null) return true;
  const setPointC = limitC - SET_POINT_UNDER_LIMIT_K;
  return roomC > setPointC + (delivering ? -BAND_K : BAND_K);
}
