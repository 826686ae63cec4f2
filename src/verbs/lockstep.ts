/**
 * A simulated plant and a daemon in lockstep over a broker: the clock moves on only when what the probes said has
 * arrived. However slow the machine, nothing comes late because of it; a pace keeps a fast one from running away.
 */
import type { SteppedClock } from '../simulator/stepped-clock.ts';
import type { Running } from '../main.ts';
import type { SimulatedPlant } from './simulated-plant.ts';

export interface LockstepOptions {
  readonly clock: SteppedClock;
  readonly running: Running;
  readonly plant: SimulatedPlant;
  readonly stepMs: number;
  /** Seconds of the clock in a second of real time at most; left out, as fast as it goes. */
  readonly mostRate?: number;
  /** Asked before each step. */
  readonly goesOn: () => boolean;
}

/** A message that has not come after this long was lost, and the lockstep goes on without it. */
const PATIENCE_MS = 1000;

export async function lockstep(options: LockstepOptions): Promise<void> {
  const { clock, plant, stepMs, mostRate, goesOn, running } = options;
  const begunMs = performance.now();
  const epochMs = clock.nowMs();
  while (goesOn()) {
    const before = running.daemon.view().heard;
    const count = await plant.advance(clock.nowMs() + stepMs);
    await heard(running, before + count);
    clock.advance(stepMs);
    const aheadMs =
      mostRate === undefined ? 0 : (clock.nowMs() - epochMs) / mostRate - (performance.now() - begunMs);
    await (aheadMs > 2 ? pause(aheadMs) : turn());
  }
}

async function heard(running: Running, count: number): Promise<void> {
  const untilMs = performance.now() + PATIENCE_MS;
  while (running.daemon.view().heard < count && performance.now() < untilMs) await turn();
}

const pause = (ms: number): Promise<void> => new Promise((done) => setTimeout(done, ms));
/** Lets the sockets have their turn. */
const turn = (): Promise<void> => new Promise((done) => setImmediate(done));
