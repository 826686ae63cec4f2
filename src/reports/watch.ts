/** Which troubles the instruments of a plant can show at all, and why not the others. */
import { LEAST_NIGHTS } from './change-point.ts';
import { SIGNATURES, type Signature } from './drift.ts';
import { seriesOf, type SeriesName } from './drift-series.ts';
import type { NightSheet } from './night-schema.ts';

export interface Watch {
  readonly signature: Signature;
  /** Figures that it is read from, with the nights that each has. */
  readonly by: readonly { readonly figure: SeriesName; readonly nights: number }[];
  /** Watched; to be watched once more nights have told its figure; or out of sight of these instruments. */
  readonly sight: 'watched' | 'not-yet' | 'out-of-sight';
  /** Why it is not watched; empty while it is. */
  readonly because: string;
}

/** Figures of each trouble, and what an instrument set must have for them. */
const READ_FROM: Readonly<Record<Signature, { figures: readonly string[]; needs: string }>> = {
  'fouled-coil': {
    figures: ['coil'],
    needs: 'without entering-water nothing tells what the coil takes from the room',
  },
  'dirty-condenser': {
    figures: ['machine-power'],
    needs:
      'without chiller-power and outdoor-temperature over long charges nothing tells what the machine takes',
  },
  'low-refrigerant': {
    figures: ['coolant'],
    needs: 'without coolant-supply a machine that makes less looks like a bank that was less empty',
  },
  'wet-insulation': {
    figures: ['leak'],
    needs:
      'without coolant-supply, entering-water and outdoor-temperature nothing tells how much ice a charge has to make good',
  },
  'tired-pump': {
    figures: ['flow', 'coil'],
    needs: 'without loop-flow or entering-water nothing tells how much water goes round',
  },
  'lying-probe': {
    figures: ['probe '],
    needs: 'without a probe in the bank or the coolant none has a place where it must stand still',
  },
  'open-door-habit': {
    figures: ['airing'],
    needs: 'no evening had the coil at rest and the outdoor air 2 K off the room for long enough',
  },
};

export function watchOf(sheets: readonly NightSheet[]): Watch[] {
  const series = seriesOf(sheets);
  return SIGNATURES.map((signature) => {
    const { figures, needs } = READ_FROM[signature];
    const by = series
      .filter((one) =>
        figures.some((name) => one.name === name || (name.endsWith(' ') && one.name.startsWith(name))),
      )
      .filter((one) => one.nights.length > 0)
      .map((one) => ({ figure: one.name, nights: one.nights.length }));
    return { signature, by, ...sightOf(by, needs, sheets) };
  });
}

function sightOf(
  by: Watch['by'],
  needs: string,
  sheets: readonly NightSheet[],
): Pick<Watch, 'sight' | 'because'> {
  const most = Math.max(0, ...by.map((one) => one.nights));
  if (most >= LEAST_NIGHTS) return { sight: 'watched', because: '' };
  if (most === 0 && sheets.length >= LEAST_NIGHTS) return { sight: 'out-of-sight', because: needs };
  return {
    sight: 'not-yet',
    because: `${most} of the ${LEAST_NIGHTS} nights that it needs have told it so far`,
  };
}
