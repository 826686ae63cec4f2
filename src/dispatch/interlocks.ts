/**
 * The interlock table, and the only place where a command is cleared. Each row says when it speaks, what it stops and
 * its sentence. The order of the rows is the order in which they are named. These software interlocks never replace
 * thermostats, high-pressure cut-outs, float switches and breakers.
 */
import { charges, commandFor, discharges } from '../commands.ts';
import type { ClearedCommand, Machine } from '../order.ts';
import { valueOf } from '../points.ts';
import { MINUTE_MS } from '../time.ts';
import type { DispatchMemory, Limits, PlantView, Request } from './types.ts';

/** An order lives three minutes, and is repeated at least every minute: two may be lost without a stop. */
export const ORDER_LIFE_MS = 3 * MINUTE_MS;

/** Time that a pump gets to fill its pipes before a low power or flow counts as dry running. */
const PRIMING_MS = MINUTE_MS;
const DRY_REST_MS = 10 * MINUTE_MS;
/** Rest after a high-pressure trip, for the pressures to settle (common practice, no source). */
const TRIP_REST_MS = 30 * MINUTE_MS;
/** Below this share of the rated flow water counts as not flowing. */
const DRY_FLOW_SHARE = 0.1;

export interface Interlock {
  readonly id: string;
  readonly stops: readonly Machine[];
  /** True for a row that keeps a stopped machine from starting but lets a running one finish. */
  readonly onlyStarts?: true;
  /** Its sentence while it speaks, else null. */
  speaks(view: PlantView, limits: Limits, memory: DispatchMemory): string | null;
}

const ALL: readonly Machine[] = ['chiller', 'pump', 'fan'];
const DELIVERY: readonly Machine[] = ['pump', 'fan'];

export const INTERLOCKS: readonly Interlock[] = [
  {
    id: 'broker away',
    stops: ALL,
    speaks: (view) =>
      view.brokerConnected ? null : 'The broker is away, so no order can be confirmed: everything rests.',
  },
  {
    id: 'high-pressure trip',
    stops: ['chiller'],
    speaks: (view, _limits, memory) => {
      if (isTrue(view, 'high-pressure-trip')) return "The ice machine's high-pressure cut-out has tripped.";
      if (isSilent(view, 'high-pressure-trip')) return silent('The high-pressure contact', 'no ice is made');
      return memory.trippedUntilMs !== null && view.nowMs < memory.trippedUntilMs
        ? 'The ice machine rests after its high-pressure cut-out tripped.'
        : null;
    },
  },
  {
    id: 'over-freeze',
    stops: ['chiller'],
    speaks: (_view, _limits, memory) =>
      memory.overFrozen ? 'The bank holds all the ice it may: more would block the flow and burst it.' : null,
  },
  {
    id: 'stale leaving water',
    stops: ['chiller'],
    speaks: (view) =>
      valueOf(view.live, 'leaving-water') === null
        ? 'Leaving water is not heard, so nobody would see the bank freeze over: no ice is made.'
        : null,
  },
  {
    id: 'high outdoor temperature',
    stops: ['chiller'],
    speaks: (_view, limits, memory) =>
      memory.hotOutdoors
        ? `It is too hot outdoors for the ice machine (limit ${shownC(limits, limits.mostOutdoorC)}).`
        : null,
  },
  {
    id: 'coil freeze',
    stops: DELIVERY,
    speaks: (_view, limits, memory) =>
      memory.coilCold
        ? `Leaving water was below ${shownC(limits, limits.coilFreezeC)}: it would freeze the fan coil.`
        : null,
  },
  {
    id: 'dry pump',
    stops: DELIVERY,
    speaks: (view, _limits, memory) =>
      memory.dryUntilMs !== null && view.nowMs < memory.dryUntilMs
        ? 'The pump ran dry: look for air, a closed valve or a low level.'
        : null,
  },
  {
    id: 'drip tray wet',
    stops: DELIVERY,
    speaks: (view) => {
      if (isTrue(view, 'drip-tray-wet'))
        return 'There is water in the drip tray: clear the condensate drain.';
      return isSilent(view, 'drip-tray-wet')
        ? silent('The drip tray contact', 'no water is sent to the coil')
        : null;
    },
  },
  {
    id: 'battery floor',
    stops: ['chiller'],
    speaks: (_view, limits, memory) =>
      memory.batteryLow
        ? `The battery is at its floor of ${limits.batteryFloorPct} %: ice waits for the sun.`
        : null,
  },
  {
    id: 'inverter limit',
    stops: ['chiller'],
    onlyStarts: true,
    speaks: (view, limits) => {
      if (limits.inverterW === null) return null;
      const house = valueOf(view.live, 'house-power') ?? limits.houseW;
      const start = Math.max(limits.startW, limits.chillerW);
      return house + start > limits.inverterW
        ? `The inverter carries ${limits.inverterW} W; the house takes ${Math.round(house)} W and a start ${Math.round(start)} W more.`
        : null;
    },
  },
  {
    id: 'clock doubtful',
    stops: ['chiller'],
    onlyStarts: true,
    speaks: (view) =>
      view.clock === 'doubtful'
        ? 'The clock cannot be trusted, so neither can the price of the hour: no start.'
        : null,
  },
];

/** A limit as the site shows temperatures. */
const shownC = ({ units }: Limits, c: number): string =>
  units === 'IP' ? `${Number((c * 1.8 + 32).toFixed(1))} °F` : `${c} °C`;

function isTrue(
  view: PlantView,
  point: 'high-pressure-trip' | 'drip-tray-wet' | 'ice-at-electrode',
): boolean {
  return valueOf(view.live, point) === 1;
}

/** A contact that the plant has, but that is not heard: it cannot be taken for a contact that says no. */
function isSilent(view: PlantView, point: 'high-pressure-trip' | 'drip-tray-wet'): boolean {
  const heard = view.live[point];
  return heard !== undefined && heard.value === null && heard.reason !== 'not-configured';
}

const silent = (what: string, so: string): string =>
  `${what} is not heard, so ${so}; if it speaks only when it changes, give it a longer max-age.`;

/** What this cycle's points change in the memory, before anything is decided. Rows with a latch have it here. */
export function observe(remembered: DispatchMemory, view: PlantView, limits: Limits): DispatchMemory {
  const memory = withoutFuture(withoutStep(remembered, view), view.nowMs);
  const tripped = isTrue(view, 'high-pressure-trip');
  return {
    ...memory,
    lastMs: view.nowMs,
    lastSteadyMs: view.steadyMs ?? null,
    ...chillerSeen(memory, view, limits),
    overFrozen: overFrozen(memory.overFrozen, view, limits),
    coilCold: latch(memory.coilCold, below(valueOf(view.live, 'leaving-water'), limits.coilFreezeC), 1.5),
    hotOutdoors: latch(
      memory.hotOutdoors,
      above(valueOf(view.live, 'outdoor-temperature'), limits.mostOutdoorC),
      1,
    ),
    batteryLow: batteryLow(memory.batteryLow, view, limits),
    dryUntilMs: ranDry(memory, view, limits) ? view.nowMs + DRY_REST_MS : memory.dryUntilMs,
    trippedUntilMs: tripped ? view.nowMs + TRIP_REST_MS : memory.trippedUntilMs,
  };
}

/** Less than this between two clocks is jitter, ms. */
const LEAST_STEP_MS = 1000;

/** A clock that was set forward must not shorten any time: what is remembered moves along with it. */
function withoutStep(memory: DispatchMemory, { nowMs, steadyMs }: PlantView): DispatchMemory {
  const { lastMs = null, lastSteadyMs = null } = memory;
  if (steadyMs === undefined || lastMs === null || lastSteadyMs === null || steadyMs < lastSteadyMs)
    return memory;
  const stepMs = nowMs - lastMs - (steadyMs - lastSteadyMs);
  if (!(stepMs > LEAST_STEP_MS)) return memory;
  const along = (atMs: number | null): number | null => (atMs === null ? null : atMs + stepMs);
  return {
    ...memory,
    chillerSinceMs: memory.chillerSinceMs + stepMs,
    chillerSeenMs: along(memory.chillerSeenMs),
    pumpOnSinceMs: along(memory.pumpOnSinceMs),
    dryUntilMs: along(memory.dryUntilMs),
    trippedUntilMs: along(memory.trippedUntilMs),
  };
}

/** A clock that was set back must not lengthen any time: what lies in the future counts from now. */
function withoutFuture(memory: DispatchMemory, nowMs: number): DispatchMemory {
  const past = (atMs: number | null): number | null => (atMs === null ? null : Math.min(atMs, nowMs));
  const rest = (untilMs: number | null, longestMs: number): number | null =>
    untilMs === null ? null : Math.min(untilMs, nowMs + longestMs);
  return {
    ...memory,
    chillerSinceMs: Math.min(memory.chillerSinceMs, nowMs),
    chillerSeenMs: past(memory.chillerSeenMs),
    pumpOnSinceMs: past(memory.pumpOnSinceMs),
    dryUntilMs: rest(memory.dryUntilMs, DRY_REST_MS),
    trippedUntilMs: rest(memory.trippedUntilMs, TRIP_REST_MS),
  };
}

function chillerSeen(memory: DispatchMemory, view: PlantView, limits: Limits): Partial<DispatchMemory> {
  const power = valueOf(view.live, 'chiller-power');
  if (power === null) return {};
  const runs = power > limits.chillerRunningAboveW;
  const seen = { chillerKnown: true, chillerSeenMs: runs ? view.nowMs : memory.chillerSeenMs };
  const takenOver = !memory.chillerKnown && runs && !memory.chillerOn;
  return takenOver ? { ...seen, chillerOn: true, chillerSinceMs: view.nowMs } : seen;
}

/** How far a value is past its limit (positive = past), or null when it is not known. */
const below = (value: number | null, limit: number): number | null => (value === null ? null : limit - value);
const above = (value: number | null, limit: number): number | null => (value === null ? null : value - limit);

/** On when the limit is passed, off when the value is back by the band; unknown keeps what was. */
function latch(was: boolean, past: number | null, band: number): boolean {
  if (past === null) return was;
  return was ? past > -band : past > 0;
}

/** Whether a point that the plant has is not heard now: it may be the one that said full. */
function isMute(view: PlantView, point: 'coolant-supply' | 'bank-level' | 'ice-at-electrode'): boolean {
  const heard = view.live[point];
  return heard !== undefined && heard.value === null && heard.reason !== 'not-configured';
}

/** Full by inventory, coolant temperature, level or electrode: whichever speaks first. A silent one keeps what was. */
function overFrozen(was: boolean, view: PlantView, limits: Limits): boolean {
  const signs = [
    latchOrNull(was, above(view.inventoryPct, 100), 3),
    limits.fullCoolantC === null
      ? null
      : latchOrNull(was, below(valueOf(view.live, 'coolant-supply'), limits.fullCoolantC), 2),
    limits.fullLevelMm === null
      ? null
      : latchOrNull(was, above(valueOf(view.live, 'bank-level'), limits.fullLevelMm), 2),
    limits.electrodeMeansFull && valueOf(view.live, 'ice-at-electrode') !== null
      ? isTrue(view, 'ice-at-electrode')
      : null,
  ];
  const heard = signs.filter((sign) => sign !== null);
  const mute =
    (limits.fullCoolantC !== null && isMute(view, 'coolant-supply')) ||
    (limits.fullLevelMm !== null && isMute(view, 'bank-level')) ||
    (limits.electrodeMeansFull && isMute(view, 'ice-at-electrode'));
  return heard.includes(true) || (was && (mute || heard.length === 0));
}

function latchOrNull(was: boolean, past: number | null, band: number): boolean | null {
  return past === null ? null : latch(was, past, band);
}

/** The floor counts unless the sun alone carries the machine and the house. */
function batteryLow(was: boolean, view: PlantView, limits: Limits): boolean {
  if (limits.batteryFloorPct === null) return false;
  const house = valueOf(view.live, 'house-power') ?? limits.houseW;
  const sun = valueOf(view.live, 'panel-power') ?? 0;
  if (sun >= house + limits.chillerW) return false;
  return latch(was, below(valueOf(view.live, 'battery-charge'), limits.batteryFloorPct), 3);
}

/**
 * A pump that runs without water: it draws less than it should, or its water does not flow. A pump that draws nothing
 * does not run, which is the switch's fault and not dryness. Only readings from after the priming count.
 */
function ranDry(memory: DispatchMemory, view: PlantView, limits: Limits): boolean {
  const sinceMs = memory.pumpOnSinceMs;
  if (sinceMs === null) return false;
  const primed = (point: 'pump-power' | 'loop-flow'): number | null => {
    const heard = view.live[point];
    return heard?.value != null && heard.atMs >= sinceMs + PRIMING_MS ? heard.value : null;
  };
  const power = primed('pump-power');
  if (power !== null && power <= limits.pumpRunningAboveW) return false;
  const flow = primed('loop-flow');
  const noLoad = limits.dryPumpW !== null && power !== null && power < limits.dryPumpW;
  return noLoad || (flow !== null && flow < DRY_FLOW_SHARE * limits.flowLPerMin);
}

/** One row's word: what it is called, what it stops now, and its sentence. */
export interface Spoken {
  readonly id: string;
  readonly stops: readonly Machine[];
  readonly sentence: string;
}

/** Every row that speaks now, whether or not anything was asked that it would stop. */
export function speaking(view: PlantView, limits: Limits, memory: DispatchMemory): Spoken[] {
  return INTERLOCKS.flatMap((row) => {
    const sentence = row.speaks(view, limits, memory);
    const mutedByRunning = row.onlyStarts && memory.chillerOn;
    return sentence === null || mutedByRunning ? [] : [{ id: row.id, stops: row.stops, sentence }];
  });
}

/** Clears what was asked for: the machines that may run, the command that this makes, and who held back what. */
export function clear(
  request: Request,
  view: PlantView,
  limits: Limits,
  memory: DispatchMemory,
): { order: ClearedCommand; memory: DispatchMemory } {
  const seen = observe(memory, view, limits);
  const words = speaking(view, limits, seen);
  const asked = { chiller: charges(request.command), pump: discharges(request.command) };
  const pumpWord = asked.pump ? words.find((word) => word.stops.includes('pump')) : undefined;
  const chiller = clearChiller(asked.chiller, view, limits, seen, words);
  const pump = asked.pump && pumpWord === undefined;
  const held = [chiller.word, pumpWord].filter((word) => word !== undefined);
  const order = {
    command: commandFor(chiller.on, pump),
    reason: held.length > 0 ? heldReason(request, held) : request.reason,
    issuedMs: view.nowMs,
    expiresMs: view.nowMs + ORDER_LIFE_MS,
    heldBackBy: [...new Set(held.map((word) => word.id))].join(', '),
    switches: { chiller: chiller.on, pump, fan: pump },
    numbers: request.numbers,
  } as unknown as ClearedCommand;
  return { order, memory: { ...seen, ...ordered(seen, view, order) } };
}

/** What was wished, if anything was, and then what holds it back. */
function heldReason({ wished }: Request, held: readonly Pick<Spoken, 'sentence'>[]): string {
  return [...(wished === undefined ? [] : [wished]), ...held.map((word) => word.sentence)].join(' ');
}

function clearChiller(
  asked: boolean,
  view: PlantView,
  limits: Limits,
  memory: DispatchMemory,
  words: readonly Spoken[],
): { on: boolean; word?: Pick<Spoken, 'id' | 'sentence'> } {
  const stop = words.find((word) => word.stops.includes('chiller'));
  const orderedMs = view.nowMs - memory.chillerSinceMs;
  if (stop !== undefined) return asked || memory.chillerOn ? { on: false, word: stop } : { on: false };
  if (memory.chillerOn) {
    if (asked || orderedMs >= limits.minOnMs) return { on: asked };
    const sentence = minutesLeft('The ice machine has just started and runs on', limits.minOnMs - orderedMs);
    return { on: true, word: { id: 'minimum on time', sentence } };
  }
  // a machine that still runs although it is ordered off has not begun to rest
  const restedMs = Math.min(orderedMs, view.nowMs - (memory.chillerSeenMs ?? Number.NEGATIVE_INFINITY));
  if (!asked || restedMs >= limits.minOffMs) return { on: asked };
  const what =
    memory.chillerSeenMs === null
      ? 'When the ice machine last ran is not known, so it rests'
      : 'The ice machine has just stopped and rests';
  const sentence = minutesLeft(what, limits.minOffMs - restedMs);
  return { on: false, word: { id: 'minimum off time', sentence } };
}

function minutesLeft(what: string, leftMs: number): string {
  const minutes = Math.max(1, Math.ceil(leftMs / MINUTE_MS));
  return `${what} for ${minutes} more ${minutes === 1 ? 'minute' : 'minutes'}, to spare the compressor.`;
}

/** What the order itself changes. */
function ordered(memory: DispatchMemory, view: PlantView, order: ClearedCommand): Partial<DispatchMemory> {
  const chillerOn = order.switches.chiller;
  return {
    chillerOn,
    chillerKnown: true,
    chillerSinceMs: chillerOn === memory.chillerOn ? memory.chillerSinceMs : view.nowMs,
    pumpOnSinceMs: order.switches.pump ? (memory.pumpOnSinceMs ?? view.nowMs) : null,
  };
}
