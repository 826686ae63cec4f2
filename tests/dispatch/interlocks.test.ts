import { describe, expect, it } from 'vitest';
import { freshMemory } from '../../src/dispatch/limits.ts';
import { clear, INTERLOCKS, ORDER_LIFE_MS } from '../../src/dispatch/interlocks.ts';
import type { DispatchMemory, Limits, PlantView } from '../../src/dispatch/types.ts';
import { COMMANDS, type Command } from '../../src/commands.ts';
import type { LivePoints, PointName } from '../../src/points.ts';

const NOW = Date.UTC(2026, 6, 14, 18);
const MINUTE = 60_000;

const limits: Limits = {
  minOnMs: 20 * MINUTE,
  minOffMs: 10 * MINUTE,
  chillerRunningAboveW: 60,
  chillerW: 550,
  startW: 1800,
  mostOutdoorC: 43,
  coilFreezeC: -1,
  pumpRunningAboveW: 10,
  dryPumpW: 20,
  flowLPerMin: 12,
  fullCoolantC: -14,
  fullLevelMm: 700,
  electrodeMeansFull: true,
  batteryFloorPct: 30,
  units: 'SI',
  inverterW: 3000,
  houseW: 150,
};

/** A plant in good order in the middle of its range: no row has anything to say. */
const calm: Partial<Record<PointName, number>> = {
  'leaving-water': 2,
  'chiller-power': 0,
  'pump-power': 45,
  'loop-flow': 12,
  'coolant-supply': -6,
  'bank-level': 600,
  'ice-at-electrode': 0,
  'outdoor-temperature': 30,
  'drip-tray-wet': 0,
  'high-pressure-trip': 0,
  'battery-charge': 80,
  'panel-power': 0,
  'house-power': 150,
};

interface Case {
  readonly points?: Partial<Record<PointName, number | null>>;
  readonly view?: Partial<Omit<PlantView, 'live' | 'nowMs'>>;
  readonly memory?: Partial<DispatchMemory>;
  readonly limits?: Partial<Limits>;
}

function live(points: Case['points'] = {}): LivePoints {
  const entries = Object.entries({ ...calm, ...points }).map(([id, value]) => [
    id,
    value === null ? { value: null, reason: 'stale', last: null } : { value, atMs: NOW },
  ]);
  return Object.fromEntries(entries) as LivePoints;
}

function run(asked: Command, c: Case) {
  const view: PlantView = {
    nowMs: NOW,
    live: live(c.points),
    inventoryPct: 50,
    clock: 'set',
    brokerConnected: true,
    ...c.view,
  };
  const rested = { ...freshMemory(NOW - 3_600_000), pumpOnSinceMs: NOW - 5 * MINUTE, ...c.memory };
  return clear({ command: asked, reason: 'asked', numbers: {} }, view, { ...limits, ...c.limits }, rested);
}

const running = { chillerOn: true, chillerKnown: true, chillerSinceMs: NOW - 60 * MINUTE };
const drawing = { 'chiller-power': 540 };

/** Every row: asked → command and who spoke. The same states are asked all four commands. */
const TABLE: [name: string, Case, expected: Record<Command, [Command, string]>][] = [
  [
    'nothing happens',
    {},
    {
      hold: ['hold', ''],
      'charge-now': ['charge-now', ''],
      discharge: ['discharge', ''],
      'charge-and-discharge': ['charge-and-discharge', ''],
    },
  ],
  [
    'nothing happens while running',
    { points: drawing, memory: running },
    {
      hold: ['hold', ''],
      'charge-now': ['charge-now', ''],
      discharge: ['discharge', ''],
      'charge-and-discharge': ['charge-and-discharge', ''],
    },
  ],
  [
    'minimum on time',
    { points: drawing, memory: { chillerOn: true, chillerSinceMs: NOW - 5 * MINUTE } },
    {
      hold: ['charge-now', 'minimum on time'],
      'charge-now': ['charge-now', ''],
      discharge: ['charge-and-discharge', 'minimum on time'],
      'charge-and-discharge': ['charge-and-discharge', ''],
    },
  ],
  [
    'minimum off time',
    { memory: { chillerSinceMs: NOW - 5 * MINUTE } },
    {
      hold: ['hold', ''],
      'charge-now': ['hold', 'minimum off time'],
      discharge: ['discharge', ''],
      'charge-and-discharge': ['discharge', 'minimum off time'],
    },
  ],
  ['full by inventory', { view: { inventoryPct: 100.5 } }, chillerStopped('over-freeze')],
  ['full by coolant', { points: { 'coolant-supply': -15 } }, chillerStopped('over-freeze')],
  ['full by level', { points: { 'bank-level': 701 } }, chillerStopped('over-freeze')],
  ['full by electrode', { points: { 'ice-at-electrode': 1 } }, chillerStopped('over-freeze')],
  [
    'full stays full inside its band',
    { view: { inventoryPct: 98 }, memory: { overFrozen: true } },
    chillerStopped('over-freeze'),
  ],
  [
    'full is over below its band',
    { view: { inventoryPct: 96 }, memory: { overFrozen: true } },
    {
      hold: ['hold', ''],
      'charge-now': ['charge-now', ''],
      discharge: ['discharge', ''],
      'charge-and-discharge': ['charge-and-discharge', ''],
    },
  ],
  [
    'full beats minimum on',
    {
      view: { inventoryPct: 101 },
      points: drawing,
      memory: { chillerOn: true, chillerSinceMs: NOW - MINUTE },
    },
    {
      hold: ['hold', 'over-freeze'],
      'charge-now': ['hold', 'over-freeze'],
      discharge: ['discharge', 'over-freeze'],
      'charge-and-discharge': ['discharge', 'over-freeze'],
    },
  ],
  ['coil freeze', { points: { 'leaving-water': -1.2 } }, deliveryStopped('coil freeze')],
  [
    'coil stays cold inside its band',
    { points: { 'leaving-water': 0.2 }, memory: { coilCold: true } },
    deliveryStopped('coil freeze'),
  ],
  ['dry pump by power', { points: { 'pump-power': 12 } }, deliveryStopped('dry pump')],
  ['dry pump by flow', { points: { 'loop-flow': 0.4 } }, deliveryStopped('dry pump')],
  [
    'pump that does not run at all is not dry',
    { points: { 'pump-power': 2 } },
    {
      hold: ['hold', ''],
      'charge-now': ['charge-now', ''],
      discharge: ['discharge', ''],
      'charge-and-discharge': ['charge-and-discharge', ''],
    },
  ],
  [
    'pump still priming',
    { points: { 'pump-power': 12 }, memory: { pumpOnSinceMs: NOW - 30_000 } },
    {
      hold: ['hold', ''],
      'charge-now': ['charge-now', ''],
      discharge: ['discharge', ''],
      'charge-and-discharge': ['charge-and-discharge', ''],
    },
  ],
  [
    'dry pump rests',
    { memory: { dryUntilMs: NOW + MINUTE, pumpOnSinceMs: null } },
    deliveryStopped('dry pump'),
  ],
  [
    'dry pump may try again',
    { memory: { dryUntilMs: NOW - MINUTE, pumpOnSinceMs: null } },
    {
      hold: ['hold', ''],
      'charge-now': ['charge-now', ''],
      discharge: ['discharge', ''],
      'charge-and-discharge': ['charge-and-discharge', ''],
    },
  ],
  ['stale leaving water', { points: { 'leaving-water': null } }, chillerStopped('stale leaving water')],
  ['high outdoor', { points: { 'outdoor-temperature': 43.5 } }, chillerStopped('high outdoor temperature')],
  [
    'high outdoor inside its band',
    { points: { 'outdoor-temperature': 42.5 }, memory: { hotOutdoors: true } },
    chillerStopped('high outdoor temperature'),
  ],
  ['tray wet', { points: { 'drip-tray-wet': 1 } }, deliveryStopped('drip tray wet')],
  ['trip', { points: { 'high-pressure-trip': 1 } }, chillerStopped('high-pressure trip')],
  ['trip contact silent', { points: { 'high-pressure-trip': null } }, chillerStopped('high-pressure trip')],
  ['tray contact silent', { points: { 'drip-tray-wet': null } }, deliveryStopped('drip tray wet')],
  ['rest after trip', { memory: { trippedUntilMs: NOW + MINUTE } }, chillerStopped('high-pressure trip')],
  ['clock doubtful, machine off', { view: { clock: 'doubtful' } }, chillerStopped('clock doubtful')],
  [
    'clock doubtful, machine running',
    { view: { clock: 'doubtful' }, points: drawing, memory: running },
    {
      hold: ['hold', ''],
      'charge-now': ['charge-now', ''],
      discharge: ['discharge', ''],
      'charge-and-discharge': ['charge-and-discharge', ''],
    },
  ],
  [
    'broker away',
    { view: { brokerConnected: false } },
    {
      hold: ['hold', ''],
      'charge-now': ['hold', 'broker away'],
      discharge: ['hold', 'broker away'],
      'charge-and-discharge': ['hold', 'broker away'],
    },
  ],
  ['battery at its floor', { points: { 'battery-charge': 29 } }, chillerStopped('battery floor')],
  [
    'battery at its floor in the sun',
    { points: { 'battery-charge': 29, 'panel-power': 900 } },
    {
      hold: ['hold', ''],
      'charge-now': ['charge-now', ''],
      discharge: ['discharge', ''],
      'charge-and-discharge': ['charge-and-discharge', ''],
    },
  ],
  ['inverter too small for a start', { points: { 'house-power': 1500 } }, chillerStopped('inverter limit')],
  [
    'two speak at once',
    { points: { 'leaving-water': null, 'drip-tray-wet': 1 } },
    {
      hold: ['hold', ''],
      'charge-now': ['hold', 'stale leaving water'],
      discharge: ['hold', 'drip tray wet'],
      'charge-and-discharge': ['hold', 'stale leaving water, drip tray wet'],
    },
  ],
];

function chillerStopped(by: string): Record<Command, [Command, string]> {
  return {
    hold: ['hold', ''],
    'charge-now': ['hold', by],
    discharge: ['discharge', ''],
    'charge-and-discharge': ['discharge', by],
  };
}

function deliveryStopped(by: string): Record<Command, [Command, string]> {
  return {
    hold: ['hold', ''],
    'charge-now': ['charge-now', ''],
    discharge: ['hold', by],
    'charge-and-discharge': ['charge-now', by],
  };
}

describe('interlock table', () => {
  for (const [name, state, expected] of TABLE) {
    it.each(COMMANDS)(`${name}: %s`, (asked) => {
      const { order } = run(asked, state);
      expect([order.command, order.heldBackBy]).toEqual(expected[asked]);
      expect(order.switches).toEqual({
        chiller: order.command.startsWith('charge'),
        pump: order.command.endsWith('discharge'),
        fan: order.command.endsWith('discharge'),
      });
      expect(order.expiresMs - order.issuedMs).toBe(ORDER_LIFE_MS);
      expect(order.reason === 'asked').toBe(order.heldBackBy === '');
    });
  }

  it('has a case for every row', () => {
    const covered = TABLE.flatMap(([, , expected]) =>
      Object.values(expected).flatMap(([, by]) => by.split(', ')),
    );
    for (const row of INTERLOCKS) expect(covered).toContain(row.id);
  });
});

describe('memory', () => {
  it('does not short-cycle after a cold start', () => {
    const view: PlantView = {
      nowMs: NOW,
      live: live(),
      inventoryPct: 50,
      clock: 'set',
      brokerConnected: true,
    };
    const { order } = clear(
      { command: 'charge-now', reason: 'asked', numbers: {} },
      view,
      limits,
      freshMemory(NOW),
    );
    expect(order.heldBackBy).toBe('minimum off time');
  });

  it('tells what was wished beside what holds it back, and nothing of it where nothing does', () => {
    const view: PlantView = {
      nowMs: NOW,
      live: live(),
      inventoryPct: 50,
      clock: 'set',
      brokerConnected: true,
    };
    const asked = {
      command: 'charge-now',
      reason: 'As you wished.',
      wished: 'You wished to make ice.',
      numbers: {},
    } as const;
    expect(clear(asked, view, limits, freshMemory(NOW)).order.reason).toMatch(
      /^You wished to make ice\. .*rests/,
    );
    const rested = {
      ...freshMemory(NOW),
      chillerSinceMs: NOW - 60 * MINUTE,
      chillerSeenMs: NOW - 60 * MINUTE,
    };
    expect(clear(asked, view, limits, rested).order.reason).toBe('As you wished.');
  });

  it('shows limits in the units of the site', () => {
    const view: PlantView = {
      nowMs: NOW,
      live: { ...live(), 'outdoor-temperature': { value: 44, atMs: NOW } },
      inventoryPct: 50,
      clock: 'set',
      brokerConnected: true,
    };
    const asked = { command: 'charge-now', reason: 'asked', numbers: {} } as const;
    expect(clear(asked, view, { ...limits, units: 'IP' }, freshMemory(NOW)).order.reason).toContain(
      '109.4 °F',
    );
  });

  const at = (nowMs: number, powerW: number, asked: Command, memory: DispatchMemory) => {
    const points = { ...live(), 'chiller-power': { value: powerW, atMs: nowMs } };
    const view: PlantView = { nowMs, live: points, inventoryPct: 50, clock: 'set', brokerConnected: true };
    return clear({ command: asked, reason: 'asked', numbers: {} }, view, limits, memory);
  };

  it('keeps a machine on for its time even when its power does not show it', () => {
    let { memory } = run('charge-now', {});
    for (let minute = 1; minute < 20; minute += 1) {
      const next = at(NOW + minute * MINUTE, 1, 'hold', memory);
      expect(next.order.heldBackBy).toBe('minimum on time');
      memory = next.memory;
    }
    expect(at(NOW + 20 * MINUTE, 1, 'hold', memory).order.command).toBe('hold');
  });

  it('never orders on what nobody asked for, whatever the meter shows', () => {
    let memory: DispatchMemory = { ...freshMemory(NOW - 60 * MINUTE), chillerKnown: true };
    for (let minute = 0; minute < 30; minute += 1) {
      const next = at(NOW + minute * MINUTE, 550, 'hold', memory);
      expect(next.order.switches.chiller).toBe(false);
      memory = next.memory;
    }
    // it still draws power although it is off: it has not begun to rest
    expect(at(NOW + 30 * MINUTE, 550, 'charge-now', memory).order.heldBackBy).toBe('minimum off time');
  });

  it('takes over a machine that runs when it starts', () => {
    const first = at(NOW, 540, 'charge-now', freshMemory(NOW));
    expect(first.order.command).toBe('charge-now');
    expect(at(NOW + MINUTE, 540, 'hold', first.memory).order.heldBackBy).toBe('minimum on time');
  });

  it('is not fooled by a clock that was set back', () => {
    const far = NOW + 365 * 24 * 60 * MINUTE;
    const memory: DispatchMemory = {
      ...freshMemory(far),
      chillerKnown: true,
      trippedUntilMs: far,
      dryUntilMs: far,
      pumpOnSinceMs: far,
    };
    const first = at(NOW, 0, 'charge-and-discharge', memory);
    expect(first.order.heldBackBy).toBe('high-pressure trip, dry pump');
    const later = at(NOW + 31 * MINUTE, 0, 'charge-and-discharge', first.memory);
    expect(later.order.command).toBe('charge-and-discharge');
  });
});
