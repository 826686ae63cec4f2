/**
 * How the published figure is known: READ in the named source; READ-2nd in a source that quotes it; COMPUTED from
 * figures that were read; 'from memory' where nobody looked it up again.
 */
export type Standing = 'READ' | 'READ-2nd' | 'COMPUTED' | 'from memory';

export interface PublishedValue {
  readonly what: string;
  readonly value: () => number | null;
  readonly expected: number;
  /** Allowed distance, in the unit of the figure. */
  readonly tolerance: number;
  /** The reason for the tolerance. */
  readonly why: string;
  /** Author, title, year, table or equation. */
  readonly source: string;
  readonly standing: Standing;
}

export interface Shared {
  readonly source: string;
  readonly standing: Standing;
  readonly why: string;
  readonly tolerance?: number;
  /** Tolerance as a part of the expected figure, where the source prints a relative accuracy. */
  readonly relative?: number;
}

export type Row = readonly [what: string, value: () => number | null, expected: number, tolerance?: number];

/** Rows that share a source and the reason for their tolerance. */
export function fromSource(shared: Shared, rows: readonly Row[]): PublishedValue[] {
  return rows.map(([what, value, expected, own]) => {
    const tolerance = own ?? shared.tolerance ?? Math.abs(expected) * (shared.relative ?? Number.NaN);
    return {
      what,
      value,
      expected,
      tolerance,
      why: shared.why,
      source: shared.source,
      standing: shared.standing,
    };
  });
}
