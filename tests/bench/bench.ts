/** What every benchmark takes and gives back. Figures are what was measured in this run; nothing is written by hand. */
export interface BenchOptions {
  /** Base seed; other seeds must tell the same story. */
  readonly seed: number;
  /** A shorter run of the same thing, for a first look. */
  readonly quick: boolean;
  /** Nights to live, for the benchmarks that live nights; their own number unless it is given. */
  readonly nights?: number;
}

export interface BenchResult {
  readonly title: string;
  /** What the figures are held against, and what the run may cost. */
  readonly budget: string;
  readonly columns: readonly string[];
  readonly rows: readonly (readonly (string | number)[])[];
  readonly figures: Readonly<Record<string, number | string>>;
  /** A figure drawn with characters, line by line. */
  readonly drawing?: readonly string[];
}
