/** What may not be shortened, lengthened or forgotten: the compressor's times over steps of the clock, restarts, silence. */
import { describe, expect, it } from 'vitest';
import { clear } from '../../src/dispatch/interlocks.ts';
import { freshMemory, limitsOf } from '../../src/dispatch/limits.ts';
import type { DispatchMemory, Limits, PlantView } from '../../src/dispatch/types.ts';
import type { Command } from '../../src/commands.ts';
import type { LivePoints, PointId } from '../../src/points.ts';
import { siteOf } from '../plant/site.ts';

const MINUTE = 60_000;
const T0 = Date.UTC(2026, 6, 1, 12);
const limits: Limits = { ...limitsOf(siteOf()), minOnMs: 20 * MINUTE, minOffMs: 10 * MINUTE };

/** A plant whose wall clock and steady clock can be moved apart. */
class Plant {
  wallMs = T0;
  steadyMs = 5_000_000;
  points: Partial<Record<PointId, number | null>> = { 'leaving-water': 3, 'outdoor-temperature': 25 };
  limits = limits;
  memory: DispatchMemory = freshMemory(T0);

  pass(ms: number): this {
    this.wallMs += ms;
    this.steadyMs += ms;
    return this;
  }

  ask(command: Command): Command {
    const live = Object.fromEntries(
      Object.entries(this.points).map(([id, value]) => [
        id,
        value === null ? { value: null, reason: 'stale', last: null } : { value, atMs: this.wallMs },
      ]),
    ) as LivePoints;
    const view: PlantView = {
      nowMs: this.wallMs,
      steadyMs: this.steadyMs,
      live,
      inventoryPct: 50,
      clock: 'set',
      brokerConnected: true,
    };
    const cleared = clear({ command, reason: '', numbers: {} }, view, this.limits, this.memory);
    this.memory = cleared.memory;
    return cleared.order.command;
  }
}

describe('a clock that is set forward', () => {
  it('does not shorten the rest after a stop', () => {
    const plant = new Plant();
    plant.ask('hold');
    expect(plant.pass(11 * MINUTE).ask('charge-now')).toBe('charge-now');
    plant.pass(25 * MINUTE).ask('hold');
    plant.pass(MINUTE).ask('hold');
    plant.wallMs += 30 * MINUTE;
    expect(plant.pass(MINUTE).ask('charge-now')).toBe('hold');
    expect(plant.pass(7 * MINUTE).ask('charge-now')).toBe('hold');
    expect(plant.pass(2 * MINUTE).ask('charge-now')).toBe('charge-now');
  });

  it('does not shorten the run after a start, nor the rest after a trip', () => {
    const plant = new Plant();
    plant.ask('hold');
    plant.pass(11 * MINUTE).ask('charge-now');
    plant.wallMs += 60 * MINUTE;
    expect(plant.pass(MINUTE).ask('hold')).toBe('charge-now');

    plant.points['high-pressure-trip'] = 1;
    expect(plant.pass(MINUTE).ask('charge-now')).toBe('hold');
    plant.points['high-pressure-trip'] = 0;
    plant.wallMs += 120 * MINUTE;
    expect(plant.pass(MINUTE).ask('charge-now')).toBe('hold');
    expect(plant.pass(30 * MINUTE).ask('charge-now')).toBe('charge-now');
  });

  it('counts the time in which the program itself was away', () => {
    const plant = new Plant();
    plant.ask('hold');
    expect(plant.pass(12 * MINUTE).ask('charge-now')).toBe('charge-now');
  });
});

describe('power that shows after an order to stop', () => {
  it('is no reason to start the machine again', () => {
    const plant = new Plant();
    expect(plant.ask('charge-now')).toBe('hold');
    plant.points['chiller-power'] = 800;
    expect(plant.pass(MINUTE / 2).ask('charge-now')).toBe('hold');
    plant.points['chiller-power'] = 2;
    expect(plant.pass(9 * MINUTE).ask('charge-now')).toBe('hold');
    expect(plant.pass(2 * MINUTE).ask('charge-now')).toBe('charge-now');
  });
});

describe('a full bank', () => {
  it.each<[PointId, Partial<Limits>, number]>([
    ['coolant-supply', { fullCoolantC: -9 }, -10],
    ['bank-level', { fullLevelMm: 790 }, 795],
    ['ice-at-electrode', { electrodeMeansFull: true }, 1],
  ])('stays full while %s, which said so, is silent', (point, more, value) => {
    const plant = new Plant();
    plant.limits = { ...limits, ...more };
    plant.points[point] = value;
    plant.ask('hold');
    expect(plant.pass(11 * MINUTE).ask('charge-now')).toBe('hold');
    plant.points[point] = null;
    expect(plant.pass(MINUTE).ask('charge-now')).toBe('hold');
    plant.points[point] = point === 'coolant-supply' ? -2 : point === 'bank-level' ? 760 : 0;
    expect(plant.pass(MINUTE).ask('charge-now')).toBe('charge-now');
  });
});
