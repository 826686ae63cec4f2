/** What the processes of the ingest benchmark say to each other, and the points that they share. */
export type Ask =
  | { readonly ask: 'begin' | 'report' | 'end' }
  | { readonly ask: 'send'; readonly count: number; readonly perSecond: number | null };

export interface Sent {
  readonly sent: number;
  /** Until the broker had taken the last message. */
  readonly tookMs: number;
}

export interface Heard {
  readonly messages: number;
  /** Readings that the intake accepted. */
  readonly readings: number;
  /** Readings of this phase in the store; counted at its end. */
  readonly stored: number;
  /** From the first message of the phase to the last. */
  readonly spanMs: number;
  /** Processor time of the receiver in the phase. */
  readonly cpuMs: number;
  readonly cpuPct: number;
  readonly mostRssMb: number;
}

/** Half of the points come as JSON objects, half as SenML packs; all tell their own time, so that each counts once. */
export interface BenchPoint {
  readonly id: string;
  readonly topic: string;
  readonly form: 'json' | 'senml';
}

const IDS = [
  'leaving-water',
  'entering-water',
  'bank-top',
  'bank-middle',
  'bank-bottom',
  'bank-surround',
  'coolant-supply',
  'coolant-return',
  'room-temperature',
  'room-temperature/loft',
  'room-temperature/bunk',
  'outdoor-temperature',
];

export const BENCH_POINTS: readonly BenchPoint[] = IDS.map((id, index) => ({
  id,
  topic: `plant/${id}`,
  form: index % 2 === 0 ? 'json' : 'senml',
}));
