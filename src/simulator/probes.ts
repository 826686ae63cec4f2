/** Probes at work: they sample the truth in their own time and report it with their faults. */
import type { Random } from '../numerics/random.ts';
import { pointSpec, type PointId, type PointSpec, type Reading } from '../points.ts';
import { DAY_MS } from '../time.ts';
import type { ProbeFaults } from './probe-faults.ts';

/** What a probe sees: the true value at its place, and that of the air which it would fall into. */
export interface Sight {
  readonly own: () => number;
  readonly surroundC: () => number;
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
  private readonly sight: Sight;
  private nextSilenceMs: number;
  private nextGlitchMs: number;
  /** What the element follows of the difference within one period; other spans are worked out as they come. */
  private readonly followsInPeriod: number;

  constructor(point: PointId, sight: Sight, faults: ProbeFaults, random: Random, startMs: number) {
    this.sight = sight;
    const spec = pointSpec(point);
    if (!spec) throw new TypeError(`${point} is no point`);
    this.point = point;
    this.spec = spec;
    this.faults = faults;
    this.random = random;
    this.startMs = startMs;
    this.followsInPeriod = this.follows(faults.periodMs);
    this.nextSilenceMs = startMs + this.waitMs(faults.dropoutPerDay);
    const glitchPerDay = spec.kind === 'temperature' ? faults.glitchPerDay : 0;
    this.nextGlitchMs = startMs + this.waitMs(glitchPerDay);
    // Probes do not all speak at once.
    this.nextMs = startMs + Math.floor(random.next() * Math.min(faults.periodMs, 60_000));
  }

  /** Samples if it is due; `sooner` (a plug that sees its machine switch) samples now. */
  look(atMs: number, report: Report, sooner = false): void {
    if (atMs < this.nextMs && !sooner) return;
    if (atMs >= this.nextMs) {
      this.nextMs += this.faults.periodMs * Math.ceil((atMs - this.nextMs + 1) / this.faults.periodMs);
    }
    this.sense(atMs);
    if (this.isSilent(atMs)) return;
    const value = this.glitch(atMs) ?? this.shown(atMs);
    const { onChangeOnly, atLeastMs } = this.faults;
    const same = onChangeOnly !== null && Math.abs(value - this.reported) < onChangeOnly;
    if (same && atMs - this.reportedMs < atLeastMs) return;
    this.reported = value;
    this.reportedMs = atMs;
    this.send({ point: this.point, atMs, value }, report);
  }

  /** Time to the next of some rare events, exponentially distributed. */
  private waitMs(perDay: number): number {
    return perDay > 0 ? (-DAY_MS / perDay) * Math.log(1 - this.random.next()) : Number.POSITIVE_INFINITY;
  }

  private follows(spanMs: number): number {
    return this.faults.lagS > 0 ? -Math.expm1(-spanMs / 1000 / this.faults.lagS) : 1;
  }

  /** The sensing element follows the truth at its place with a first-order lag. */
  private sense(atMs: number): void {
    const { fallenOutAtMs, periodMs } = this.faults;
    const fallen = fallenOutAtMs !== null && atMs >= fallenOutAtMs;
    const trueValue = fallen ? this.sight.surroundC() : this.sight.own();
    const spanMs = atMs - this.sensedMs;
    const part = spanMs === periodMs ? this.followsInPeriod : this.follows(spanMs);
    this.sensedC = Number.isNaN(this.sensedC) ? trueValue : this.sensedC + part * (trueValue - this.sensedC);
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
    if (atMs < this.nextSilenceMs) return false;
    this.silentUntilMs = atMs - this.faults.dropoutS * 1000 * Math.log(1 - this.random.next());
    this.nextSilenceMs = this.silentUntilMs + this.waitMs(this.faults.dropoutPerDay);
    return true;
  }

  private glitch(atMs: number): number | null {
    if (atMs < this.nextGlitchMs) return null;
    this.nextGlitchMs = atMs + this.waitMs(this.faults.glitchPerDay);
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
