/** Probes at work: they sample the truth in their own time and report it with their faults. */
import type { Random } from '../numerics/random.ts';
import { pointSpec, type PointId, type PointSpec, type Reading } from '../points.ts';
import { DAY_MS } from '../time.ts';
import type { ProbeFaults } from './probe-faults.ts';

/** What a probe sees: the true value at its place, and that of the air which it would fall into. */
export interface Sight {
  valueOf(point: PointId): number;
  surroundC(): number;
}

/** Where a reading goes; `arrivesMs` is when the hub hears it. */
export type Report = (reading: Reading, arrivesMs: number) => void;

export class Probe {
  readonly point: PointId;
  nextMs: number;
  private readonly faults: ProbeFaults;
  private readonly spec: PointSpec;
  private readonly random: Random;
  private readonly startMs: number;
  private sensedC = Number.NaN;
  private sensedMs = 0;
  private reported = Number.NaN;
  private reportedMs = Number.NEGATIVE_INFINITY;
  private silentUntilMs = 0;
  private stuckAt = Number.NaN;
  /** Chances for each sample, worked out once. */
  private readonly dropoutChance: number;
  private readonly glitchChance: number;

  constructor(point: PointId, faults: ProbeFaults, random: Random, startMs: number) {
    const spec = pointSpec(point);
    if (!spec) throw new TypeError(`${point} is no point`);
    this.point = point;
    this.spec = spec;
    this.faults = faults;
    this.random = random;
    this.startMs = startMs;
    this.dropoutChance = (faults.dropoutPerDay * faults.periodMs) / DAY_MS;
    const oneWire = spec.kind === 'temperature';
    this.glitchChance = oneWire ? (faults.glitchPerDay * faults.periodMs) / DAY_MS : 0;
    // Probes do not all speak at once.
    this.nextMs = startMs + Math.floor(random.next() * Math.min(faults.periodMs, 60_000));
  }

  /** Samples if it is due; `sooner` (a plug that sees its machine switch) samples now. */
  look(atMs: number, sight: Sight, report: Report, sooner = false): void {
    if (atMs < this.nextMs && !sooner) return;
    if (atMs >= this.nextMs) {
      this.nextMs += this.faults.periodMs * Math.ceil((atMs - this.nextMs + 1) / this.faults.periodMs);
    }
    this.sense(atMs, sight);
    if (this.isSilent(atMs)) return;
    const value = this.glitch() ?? this.shown(atMs);
    const { onChangeOnly, atLeastMs } = this.faults;
    const same = onChangeOnly !== null && Math.abs(value - this.reported) < onChangeOnly;
    if (same && atMs - this.reportedMs < atLeastMs) return;
    this.reported = value;
    this.reportedMs = atMs;
    this.send({ point: this.point, atMs, value }, report);
  }

  /** The sensing element follows the truth at its place with a first-order lag. */
  private sense(atMs: number, sight: Sight): void {
    const { fallenOutAtMs, swappedWith, lagS } = this.faults;
    const fallen = fallenOutAtMs !== null && atMs >= fallenOutAtMs;
    const trueValue = fallen ? sight.surroundC() : sight.valueOf(swappedWith ?? this.point);
    const follows = lagS > 0 ? -Math.expm1((this.sensedMs - atMs) / 1000 / lagS) : 1;
    this.sensedC = Number.isNaN(this.sensedC)
      ? trueValue
      : this.sensedC + follows * (trueValue - this.sensedC);
    this.sensedMs = atMs;
  }

  private shown(atMs: number): number {
    const { stuckFromMs, offsetK, offsetDriftPerDay, noise, stepC } = this.faults;
    if (stuckFromMs !== null && atMs >= stuckFromMs && !Number.isNaN(this.stuckAt)) return this.stuckAt;
    const drift = (offsetDriftPerDay * (atMs - this.startMs)) / DAY_MS;
    const raw = this.sensedC + offsetK + drift + (noise > 0 ? noise * this.random.normal() : 0);
    const stepped = stepC > 0 ? Math.round(raw / stepC) * stepC : raw;
    this.stuckAt = this.bounded(Math.round(stepped * 1e4) / 1e4);
    return this.stuckAt;
  }

  /** Powers never read below nothing, and humidity saturates. */
  private bounded(value: number): number {
    if (this.spec.kind === 'power' && this.point !== 'grid-power') return Math.max(0, value);
    return this.spec.kind === 'fraction' ? Math.max(0, Math.min(100, value)) : value;
  }

  private isSilent(atMs: number): boolean {
    if (atMs < this.silentUntilMs) return true;
    if (this.dropoutChance === 0 || this.random.next() >= this.dropoutChance) return false;
    this.silentUntilMs = atMs - this.faults.dropoutS * 1000 * Math.log(1 - this.random.next());
    return true;
  }

  private glitch(): number | null {
    if (this.glitchChance === 0 || this.random.next() >= this.glitchChance) return null;
    return this.random.next() < 0.5 ? 85 : -127;
  }

  private send(reading: Reading, report: Report): void {
    const { lateS, straggles, duplicate } = this.faults;
    const straggling =
      straggles > 0 && this.random.next() < straggles ? 30_000 + 300_000 * this.random.next() : 0;
    const arrivesMs = reading.atMs + 1000 * lateS + straggling;
    report(reading, arrivesMs);
    if (duplicate > 0 && this.random.next() < duplicate) report(reading, arrivesMs + 2000);
  }
}
