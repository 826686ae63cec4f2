/** The newest record and the points as metric families, in base units: joules, celsius, watts, ratios, seconds. */
import { COMMANDS, MODES, PHASES, STRATEGIES, WISHES } from '../commands.ts';
import type { CycleRecord } from '../record.ts';
import type { MetricFamily, Sample } from './exposition.ts';
import type { NowView, PointRow } from './source.ts';

const JOULES_PER_KWH = 3.6e6;

type Labels = Readonly<Record<string, string>>;
const NONE: Labels = {};

function gauge(name: string, unit: string, help: string, samples: readonly (Sample | null)[]): MetricFamily {
  const full = unit ? `rimehold_${name}_${unit}` : `rimehold_${name}`;
  return { name: full, type: 'gauge', unit, help, samples: samples.filter((one) => one !== null) };
}

/** One sample, or none where the figure is not known. */
function sample(value: number | null | undefined, labels: Labels = NONE, factor = 1): Sample | null {
  return value === null || value === undefined || !Number.isFinite(value)
    ? null
    : { labels, value: value * factor };
}

function stateset(name: string, help: string, states: readonly string[], current: string): MetricFamily {
  const full = `rimehold_${name}`;
  const samples = states.map((state) => ({ labels: { [full]: state }, value: state === current ? 1 : 0 }));
  return { name: full, type: 'stateset', unit: '', help, samples };
}

/** Families with nothing to say are left out. */
export function metricFamilies(now: NowView, recordsSinceStart: number): MetricFamily[] {
  const families = [
    info(now),
    counter('records', 'Records written since the daemon started.', recordsSinceStart),
    ...healthFamilies(now),
    ...(now.record ? recordFamilies(now.record, now.site.currency) : []),
    ...pointFamilies(now.points),
  ];
  return families.filter((family) => family.samples.length > 0);
}

function info(now: NowView): MetricFamily {
  const labels = { site: now.site.id, zone: now.site.zone, version: now.site.revision };
  return {
    name: 'rimehold',
    type: 'info',
    unit: '',
    help: 'The site and the program.',
    samples: [{ labels, value: 1 }],
  };
}

function counter(name: string, help: string, value: number): MetricFamily {
  return { name: `rimehold_${name}`, type: 'counter', unit: '', help, samples: [{ labels: {}, value }] };
}

function healthFamilies(now: NowView): MetricFamily[] {
  const { broker, clock, store } = now.health;
  return [
    stateset('broker', 'Whether the broker is reached.', ['connected', 'away'], broker.state),
    stateset('clock', 'Whether the wall clock is trusted.', ['set', 'doubtful'], clock.state),
    stateset('store', 'State of the database.', ['ok', 'full', 'broken'], store.state),
  ];
}

function recordFamilies(record: CycleRecord, currency: string): MetricFamily[] {
  return [
    gauge('record_timestamp', 'seconds', 'When the newest record was written.', [
      sample(record.atMs, NONE, 1e-3),
    ]),
    ...bankFamilies(record),
    ...planFamilies(record, currency),
    gauge('temperature', 'celsius', 'Temperatures heard.', [
      sample(record.leavingWaterC, { place: 'leaving-water' }),
      sample(record.enteringWaterC, { place: 'entering-water' }),
      sample(record.roomC, { place: 'room' }),
      sample(record.outdoorC, { place: 'outdoor' }),
    ]),
    gauge('electric_power', 'watts', 'Electrical power heard.', [
      sample(record.chillerPowerW, { machine: 'chiller' }),
      sample(record.pumpPowerW, { machine: 'pump' }),
      sample(record.fanPowerW, { machine: 'fan' }),
    ]),
    gauge('comfort_limit', 'celsius', 'Room temperature above which hours are warm.', [
      sample(record.limitC),
    ]),
    stateset('mode', 'What the plant does, as observed.', MODES, record.mode),
    stateset('command', 'What the plant is told.', COMMANDS, record.command),
    stateset('strategy', 'Who decides.', STRATEGIES, record.strategy),
    stateset('phase', 'What the bank holds.', PHASES, record.phase),
    stateset('wish', "The owner's wish.", WISHES, record.wish),
  ];
}

function bankFamilies(record: CycleRecord): MetricFamily[] {
  return [
    gauge('ice_on_hand', 'joules', 'Cooling still in the bank; low and high are the 90 % interval.', [
      sample(record.iceOnHandKwh, { bound: 'estimate' }, JOULES_PER_KWH),
      sample(record.iceOnHandLowKwh, { bound: 'low' }, JOULES_PER_KWH),
      sample(record.iceOnHandHighKwh, { bound: 'high' }, JOULES_PER_KWH),
    ]),
    gauge('ice_mass', 'kilograms', 'Ice in the bank.', [sample(record.iceKg)]),
    gauge('inventory', 'ratio', 'Ice over the most that the bank may hold.', [
      sample(record.inventoryPct, NONE, 0.01),
    ]),
    gauge('heat_leak', 'watts_per_kelvin', 'Learned heat leak of the bank.', [sample(record.heatLeakWPerK)]),
    gauge('heat', 'watts', 'Heat into and out of the bank, positive as named.', [
      sample(record.chargingW, { path: 'charging' }),
      sample(record.dischargingW, { path: 'discharging' }),
      sample(record.leakW, { path: 'leak' }),
      sample(record.deliveredW, { path: 'delivered' }),
    ]),
  ];
}

function planFamilies(record: CycleRecord, currency: string): MetricFamily[] {
  const labels = { currency };
  return [
    gauge('price', 'money_per_kilowatt_hour', 'Price of electricity now.', [
      sample(record.priceMoneyPerKwh, labels),
    ]),
    gauge('worth_of_ice', 'money_per_kilowatt_hour', 'What one more kilowatt-hour of ice would save.', [
      sample(record.worthOfIceMoneyPerKwh, labels),
    ]),
    gauge('evening_load', 'joules', 'Forecast cooling of the evening.', [
      sample(record.eveningLoadKwh, { bound: 'estimate' }, JOULES_PER_KWH),
      sample(record.eveningLoadHighKwh, { bound: 'p90' }, JOULES_PER_KWH),
    ]),
  ];
}

function pointFamilies(points: readonly PointRow[]): MetricFamily[] {
  return [
    gauge(
      'point_age',
      'seconds',
      'Age of the last value of a point.',
      points.map((row) => sample(row.ageMs, { point: row.point }, 1e-3)),
    ),
    gauge(
      'point_fresh',
      '',
      'Whether a point is in use: 1 fresh, 0 not.',
      points.map((row) => sample(row.fresh ? 1 : 0, { point: row.point })),
    ),
  ];
}
