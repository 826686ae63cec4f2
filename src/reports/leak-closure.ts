/** The bank's leak from one charge's end to the next, over the sheets of many nights; see refill.ts. */
import type { NightSheet } from './night-schema.ts';

type Refill = NonNullable<NightSheet['refill']>;
type Sums = Refill['until'];

/** What one closure says: the leak, were flow and catalogue right, and what the errors of both grow with. */
export interface Closure {
  /** Night of the later charge. */
  readonly date: string;
  readonly leakWPerK: number;
  /** Heat melted for each kelvin-hour: an error of the flow puts a part of it on the leak. */
  readonly meltedWPerK: number;
}

/** Cooler condensing air makes a machine draw its coolant down further; measured on no plant, but of this order (R-134a tables). */
const COLDER_PER_K = 0.001;
/** A chain of nights without a charge that is longer than this says little. */
const MOST_KH = 5 * 24 * 30;
const LEAST_KH = 200;
const MOST_UNHEARD_H = 0.5;

interface Anchor {
  readonly curve: readonly { readonly madeKwh: number; readonly level: number }[];
}

/** Sheets in order of their nights; a night that is missing or not whole starts afresh. */
export function closuresOf(
  sheets: readonly NightSheet[],
  follows: (before: NightSheet, after: NightSheet) => boolean,
): Closure[] {
  const out: Closure[] = [];
  let anchor: Anchor | null = null;
  let sums = NOTHING;
  let before: NightSheet | null = null;
  for (const sheet of sheets) {
    const { refill } = sheet;
    if (before !== null && !follows(before, sheet)) anchor = null;
    before = sheet;
    if (refill === null || refill === undefined) {
      anchor = null;
      continue;
    }
    sums = added(sums, refill.until);
    if (refill.chargeEnd === null) continue;
    if (refill.curve.length < 2) {
      // a charge that did not get to ice is no mark to come back to
      sums = added(sums, refill.after);
      continue;
    }
    const here: Anchor = { curve: refill.curve.map(levelled) };
    const closure = anchor === null ? null : closed(sheet.night.date, anchor, here, sums);
    if (closure !== null) out.push(closure);
    anchor = here;
    sums = refill.after;
  }
  return out;
}

const NOTHING: Sums = { madeKwh: 0, meltedKwh: 0, surroundKh: 0, unheardHours: 0 };

function added(a: Sums, b: Sums): Sums {
  return {
    madeKwh: a.madeKwh + b.madeKwh,
    meltedKwh: a.meltedKwh + b.meltedKwh,
    surroundKh: a.surroundKh + b.surroundKh,
    unheardHours: a.unheardHours + b.unheardHours,
  };
}

function levelled({ madeKwh, belowZeroK, outdoorC }: Refill['curve'][number]) {
  return { madeKwh, level: Math.log(Math.max(0.1, belowZeroK)) + COLDER_PER_K * outdoorC };
}

function closed(date: string, from: Anchor, to: Anchor, sums: Sums): Closure | null {
  if (!(sums.surroundKh > LEAST_KH && sums.surroundKh < MOST_KH) || sums.unheardHours > MOST_UNHEARD_H)
    return null;
  const grown = grownKwh(from, to);
  if (grown === null) return null;
  return {
    date,
    leakWPerK: ((sums.madeKwh - sums.meltedKwh - grown) / sums.surroundKh) * 1000,
    meltedWPerK: (sums.meltedKwh / sums.surroundKh) * 1000,
  };
}

/** By how much more ice the later charge ended: whichever went further passed the other's end on its way. */
function grownKwh(from: Anchor, to: Anchor): number | null {
  const further = to.curve[0].level >= from.curve[0].level;
  const beyond = further ? pastKwh(to, from.curve[0].level) : pastKwh(from, to.curve[0].level);
  return beyond === null ? null : further ? beyond : -beyond;
}

/** What a charge made after it passed a level of the coolant; null when it never did. */
function pastKwh({ curve }: Anchor, level: number): number | null {
  for (let i = 0; i + 1 < curve.length; i++) {
    const [later, earlier] = [curve[i], curve[i + 1]];
    if (!(later.level >= level && level >= earlier.level)) continue;
    const fall = later.level - earlier.level;
    const part = fall > 0 ? (later.level - level) / fall : 0;
    return later.madeKwh + part * (earlier.madeKwh - later.madeKwh) - curve[0].madeKwh;
  }
  return null;
}
