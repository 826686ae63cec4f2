/** The cabin as it has been learned: refitted twice a day to the last weeks, with what it leaves unexplained. */
import type { SiteConfig } from '../config.ts';
import { cabinOfConfig, type CabinParameters } from './cabin.ts';
import { fitCabin } from './cabin-fit.ts';
import { trackCabin, type CabinTrack } from './cabin-track.ts';
import { hourOfDay } from './bins.ts';
import type { Book } from './book.ts';

/** Hours between two fits and the weeks that they rest on (one to two suffice: Braun & Chaturvedi 2002). */
const FIT_EVERY_HOURS = 12;
const FIT_HOURS = 21 * 24;
/** Hours of learning below which the site file alone speaks. */
const LEAST_HOURS = 48;

export interface CabinMemory {
  readonly fittedHour: number;
  readonly parameters: CabinParameters;
  readonly refusedDays: readonly number[];
  readonly learnedHours: number;
}

export interface OwnCabin {
  /** Refits when it is time. */
  update(book: Book): void;
  readonly memory: CabinMemory | null;
  readonly parameters: CabinParameters;
  /** The book run through the cabin as it is known now. */
  track(book: Book): CabinTrack;
}

export function createOwnCabin(config: SiteConfig, remembered: CabinMemory | null): OwnCabin {
  const prior = cabinOfConfig(config);
  let memory = remembered;
  let tracked: { readonly book: Book; readonly track: CabinTrack } | null = null;
  return {
    update(book) {
      const hour = book.last?.hour ?? 0;
      if (hour % FIT_EVERY_HOURS !== 0 || memory?.fittedHour === hour) return;
      const hours = book.cabinHours.slice(-FIT_HOURS);
      if (hours.filter((line) => line.roomC !== null && line.outdoorC !== null).length < LEAST_HOURS) return;
      memory = { fittedHour: hour, ...fitCabin(prior, hours) };
      tracked = null;
    },
    get memory() {
      return memory;
    },
    get parameters() {
      return memory?.parameters ?? prior;
    },
    track(book) {
      if (tracked?.book !== book) {
        tracked = { book, track: trackCabin(memory?.parameters ?? prior, book.cabinHours) };
      }
      return tracked.track;
    },
  };
}

/** Fading of what was unexplained lately: of its daily mean, h, and of the last hours, per hour. */
const DAY_FADE_HOURS = 72;
const QUICK_FADE = 0.8;

/**
 * The unexplained heat expected after `at` (an index into the track), for leads 1 …: its recent level fades; the usual
 * hour of the day is already in the cabin's gains.
 */
export function unexplainedAhead(
  unexplainedW: readonly (number | null)[],
  at: number,
  leads: number,
): Float64Array {
  const day = meanBack(unexplainedW, at, 24);
  const hours = meanBack(unexplainedW, at, 3, day);
  return Float64Array.from(
    { length: leads },
    (_, i) => 0.6 * day * Math.exp(-(i + 1) / DAY_FADE_HOURS) + 0.7 * (hours - day) * QUICK_FADE ** (i + 1),
  );
}

function meanBack(values: readonly (number | null)[], at: number, count: number, fallback = 0): number {
  const known = values.slice(Math.max(0, at - count + 1), at + 1).filter((value) => value !== null);
  return known.length < count / 3 ? fallback : known.reduce((sum, value) => sum + value, 0) / known.length;
}

/** Heat of gains for each slot from a start hour. */
export const gainAt = (p: CabinParameters, hour: number): number => p.gainsW[hourOfDay(Math.floor(hour))];
