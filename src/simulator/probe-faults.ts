/** What may be wrong with a probe, and what an ordinary one is like. */
import type { Random } from '../numerics/random.ts';
import type { PointId, PointSpec } from '../points.ts';

export interface ProbeFaults {
  readonly offsetK: number;
  readonly offsetDriftPerDay: number;
  readonly lagS: number;
  /** Smallest step that it can tell, in the point's own unit. */
  readonly stepC: number;
  readonly noise: number;
  /** Times a day at which it falls silent, and for how long on average. */
  readonly dropoutPerDay: number;
  readonly dropoutS: number;
  /** One-wire thermometers only: single readings of 85 or −127. */
  readonly glitchPerDay: number;
  readonly stuckFromMs: number | null;
  readonly periodMs: number;
  /** Reports only when the value has changed by this much since its last report, in the point's unit; null: always. */
  readonly onChangeOnly: number | null;
  /** Even without a change it reports after this long. */
  readonly atLeastMs: number;
  /** Readings come this much after they were measured. */
  readonly lateS: number;
  /** Part of the readings that come late by a further random while, and so out of order. */
  readonly straggles: number;
  /** Part of the readings that come twice. */
  readonly duplicate: number;
  /** Shows what another probe should. */
  readonly swappedWith: PointId | null;
  /** From then on it hangs in the air round the bank. */
  readonly fallenOutAtMs: number | null;
}

export type ProbeOverrides = Readonly<Partial<Record<PointId, Partial<ProbeFaults>>>>;

const NO_FAULTS: ProbeFaults = {
  offsetK: 0,
  offsetDriftPerDay: 0,
  lagS: 0,
  stepC: 0,
  noise: 0,
  dropoutPerDay: 0,
  dropoutS: 600,
  glitchPerDay: 0,
  stuckFromMs: null,
  periodMs: 30_000,
  onChangeOnly: null,
  atLeastMs: 60_000,
  lateS: 0,
  straggles: 0,
  duplicate: 0,
  swappedWith: null,
  fallenOutAtMs: null,
};

/** A probe without any fault or delay; for tests of what reads it. */
export const PERFECT_PROBE: Partial<ProbeFaults> = { ...NO_FAULTS };

const clipped = (normal: number, most: number): number => Math.max(-most, Math.min(most, normal));

/** An ordinary probe for a point, drawn from the seed: one-wire in the water, plugs on the machines, radio in rooms. */
export function ordinaryProbe(name: string, spec: PointSpec, random: Random): ProbeFaults {
  if (spec.kind === 'boolean')
    return { ...NO_FAULTS, onChangeOnly: 0.5, atLeastMs: 600_000, periodMs: 10_000 };
  if (spec.kind === 'power') return plug(random);
  if (name.startsWith('room-') || name.startsWith('outdoor-')) return radio(spec, random);
  if (spec.kind === 'temperature') return oneWire(random);
  if (spec.kind === 'fraction') return { ...NO_FAULTS, stepC: 1, periodMs: 60_000 };
  const part = spec.kind === 'level' ? 2 : 0.1;
  return { ...NO_FAULTS, offsetK: clipped(part * random.normal(), 2 * part), noise: part, stepC: part / 10 };
}

/** ±0.5 K, 0.0625 K steps (design notes: probes as they really are); lag of a probe strapped on or in a pocket. */
function oneWire(random: Random): ProbeFaults {
  return {
    ...NO_FAULTS,
    offsetK: clipped(0.2 * random.normal(), 0.5),
    lagS: 15 + 25 * random.next(),
    stepC: 0.0625,
    noise: 0.02,
    dropoutPerDay: 0.5,
    glitchPerDay: 0.3,
    periodMs: 30_000,
  };
}

function plug(random: Random): ProbeFaults {
  return {
    ...NO_FAULTS,
    offsetK: 0.3 * random.normal(),
    noise: 1,
    stepC: 0.1,
    periodMs: 20_000,
    onChangeOnly: 2.5,
    dropoutPerDay: 0.2,
  };
}

function radio(spec: PointSpec, random: Random): ProbeFaults {
  const humidity = spec.kind === 'fraction';
  return {
    ...NO_FAULTS,
    offsetK: humidity ? clipped(1.5 * random.normal(), 3) : clipped(0.2 * random.normal(), 0.5),
    lagS: humidity ? 120 : 240,
    stepC: humidity ? 0.5 : 0.1,
    noise: humidity ? 0.4 : 0.04,
    dropoutPerDay: 0.5,
    dropoutS: 1800,
    periodMs: 60_000 + 30_000 * Math.floor(3 * random.next()),
    onChangeOnly: humidity ? 1 : 0.15,
    atLeastMs: 300_000,
    duplicate: 0.03,
    straggles: 0.02,
  };
}
