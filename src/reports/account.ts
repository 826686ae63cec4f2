/**
 * The bank's energy account of a night. Cold is counted: what the machine took out comes in, what the loop and the leak
 * brought in goes out. Ice at both ends comes from the estimate, the fluxes from the records, so the residual is
 * what the estimate had to correct: cold that no flux accounts for. It is named, not spread.
 */
import type { SiteConfig } from '../config.ts';
import type { Mode } from '../commands.ts';
import type { CycleRecord } from '../record.ts';
import { formatInstant, type Night } from '../time.ts';
import type { Display } from './display.ts';
import type { ProbeState } from './coverage.ts';
import type { NightSheet } from './night-schema.ts';
import { energyKwh, extreme, hoursOf, rounded, type Span } from './spans.ts';

/** Ice melted by 1 kWh: 3.6 MJ over 333.43 kJ/kg, the heat of fusion of the IAPWS ice equation (Feistel & Wagner 2006). */
export const ICE_KG_PER_KWH = 3.6e6 / 333_430;
/** Specific heat times density of water near 5 °C, J/(L·K): 4.205 kJ/(kg·K) × 1.000 kg/L (IAPWS-95). */
const WATER_J_PER_L_K = 4205;
/** A residual above this share of the throughput is worth a culprit (common practice for heat balances, no source). */
const LARGE_PCT = 5;
/** Below this throughput a percentage says nothing. */
const LEAST_THROUGHPUT_KWH = 0.5;
/** Difference of heard and recorded heat from which the flow or the pair of thermometers is suspected. */
const FLOW_SUSPECT = 0.1;
/** An error at the ice point from which a thermometer is the suspect: the one-wire class's own ±0.5 K (common practice). */
const PROBE_SUSPECT_K = 0.5;

export interface IceState {
  readonly kwh: number;
  /** Heat that the water holds above the useful leaving temperature, as cold below zero; 0 while there is ice on hand. */
  readonly pastUseKwh: number;
  readonly lowKwh: number;
  readonly highKwh: number;
  readonly kg: number;
}

export function netW(record: CycleRecord): number {
  return record.chargingW - record.dischargingW - record.leakW;
}

/**
 * Ice on hand at the start of the first span: the record before the night where there is one; else the first record led
 * back by its own fluxes.
 */
export function iceAtStart(spans: readonly Span[], before: CycleRecord | null, site: SiteConfig): IceState {
  const first = spans[0];
  if (before !== null && first.fromMs - before.atMs < first.record.spanMs) return iceState(before, 0, site);
  return iceState(first.record, (netW(first.record) * first.hours) / 1000, site);
}

/** Ice on hand ends at zero where its water gets too warm to cool; the account goes on below it. */
function pastUseKwh(record: CycleRecord, site: SiteConfig): number {
  const { waterL, usefulLeavingC } = site.bank;
  return Math.min(0, ((usefulLeavingC - record.waterC) * waterL * WATER_J_PER_L_K) / 3.6e6);
}

export function iceState(record: CycleRecord, lessKwh: number, site: SiteConfig): IceState {
  return {
    kwh: record.iceOnHandKwh - lessKwh,
    pastUseKwh: pastUseKwh(record, site),
    lowKwh: record.iceOnHandLowKwh - lessKwh,
    highKwh: record.iceOnHandHighKwh - lessKwh,
    kg: record.iceKg,
  };
}

export function iceOf(spans: readonly Span[], start: IceState, site: SiteConfig): NightSheet['ice'] {
  const end = iceState(spans[spans.length - 1].record, 0, site);
  const lowest = extreme(spans, (record) => record.iceOnHandKwh, -1);
  return {
    startKwh: rounded(start.kwh, 3),
    startLowKwh: rounded(start.lowKwh, 3),
    startHighKwh: rounded(start.highKwh, 3),
    endKwh: rounded(end.kwh, 3),
    endLowKwh: rounded(end.lowKwh, 3),
    endHighKwh: rounded(end.highKwh, 3),
    startKg: rounded(start.kg, 2),
    endKg: rounded(end.kg, 2),
    lowestKwh: rounded(lowest?.value ?? end.kwh, 3),
    lowestAt: formatInstant(lowest?.atMs ?? spans[spans.length - 1].toMs),
    mostKg: site.bank.mostIceKg,
  };
}

export function asIce(kwh: number): { kwh: number; kg: number } {
  return { kwh: rounded(kwh, 3), kg: rounded(kwh * ICE_KG_PER_KWH, 2) };
}

type Balance = NightSheet['balance'];
type Residuals = Balance['whileKwh'];

export interface BalanceInput {
  readonly site: SiteConfig;
  readonly spans: readonly Span[];
  readonly start: IceState;
  readonly night: Night;
  readonly probes: readonly ProbeState[];
  readonly doubtfulMinutes: number;
  /** What the owner's word alone changed of the ice on hand. */
  readonly toldKwh: number;
  readonly show: Display;
}

export function balanceOf(input: BalanceInput): Balance {
  const { spans, start, site } = input;
  const end = iceState(spans[spans.length - 1].record, 0, site);
  const inKwh = energyKwh(spans, (record) => record.chargingW);
  const outKwh = energyKwh(spans, (record) => record.dischargingW);
  const leakKwh = energyKwh(spans, (record) => record.leakW);
  const warmedKwh = start.pastUseKwh - end.pastUseKwh;
  const changeKwh = end.kwh - start.kwh - warmedKwh;
  const residualKwh = inKwh - outKwh - leakKwh - changeKwh;
  const throughput = Math.max(inKwh, outKwh + leakKwh);
  const residualPct = throughput >= LEAST_THROUGHPUT_KWH ? (residualKwh / throughput) * 100 : null;
  const uncertaintyKwh = Math.hypot(halfWidth(start), halfWidth(end));
  const whileKwh = residualsByMode(spans, start, site);
  const heard = heardOut(spans);
  const verdict = verdictOf(residualPct, residualKwh, uncertaintyKwh);
  const culprit =
    verdict === 'closes' || verdict === 'unknown' ? '' : culpritOf(residualKwh, whileKwh, heard, input);
  return {
    inKwh: rounded(inKwh, 3),
    outKwh: rounded(outKwh, 3),
    leakKwh: rounded(leakKwh, 3),
    changeKwh: rounded(changeKwh, 3),
    warmedPastUseKwh: rounded(warmedKwh, 3),
    residualKwh: rounded(residualKwh, 3),
    residualPct: residualPct === null ? null : rounded(residualPct, 2),
    uncertaintyKwh: rounded(uncertaintyKwh, 3),
    whileKwh: {
      charging: rounded(whileKwh.charging, 3),
      discharging: rounded(whileKwh.discharging, 3),
      resting: rounded(whileKwh.resting, 3),
      gaps: rounded(whileKwh.gaps, 3),
    },
    heardOutKwh: heard.kwh === null ? null : rounded(heard.kwh, 3),
    heardOutHoursPct: rounded(heard.hoursPct, 1),
    verdict,
    culprit,
    sentence: sentenceFor(verdict, residualKwh, residualPct, uncertaintyKwh, culprit, input.show),
  };
}

function halfWidth(state: IceState): number {
  return Math.max(0, state.highKwh - state.lowKwh) / 2;
}

function verdictOf(pct: number | null, residualKwh: number, uncertaintyKwh: number): Balance['verdict'] {
  if (pct === null) return 'unknown';
  if (Math.abs(pct) <= LARGE_PCT) return 'closes';
  return Math.abs(residualKwh) <= uncertaintyKwh ? 'within-estimate' : 'open';
}

function sideOf(mode: Mode): 'charging' | 'discharging' | 'resting' {
  if (mode === 'charging' || mode === 'charging-while-discharging') return 'charging';
  return mode === 'discharging' ? 'discharging' : 'resting';
}

/** Each step's own residual, gathered by what the plant did in it; steps over a gap apart. */
function residualsByMode(spans: readonly Span[], start: IceState, site: SiteConfig): Residuals {
  const out = { charging: 0, discharging: 0, resting: 0, gaps: 0 };
  let cold = start.kwh + start.pastUseKwh;
  let endMs = spans[0].fromMs;
  for (const span of spans) {
    const fluxKwh = (netW(span.record) * span.hours) / 1000;
    const now = span.record.iceOnHandKwh + pastUseKwh(span.record, site);
    const residual = fluxKwh - (now - cold);
    const overGap = span.fromMs - endMs > span.record.spanMs;
    out[overGap ? 'gaps' : sideOf(span.record.mode)] += residual;
    cold = now;
    endMs = span.toMs;
  }
  return out;
}

interface Heard {
  readonly kwh: number | null;
  readonly hoursPct: number;
  /** Recorded heat over the same hours, for a fair comparison. */
  readonly recordedKwh: number;
}

/** Heat brought in by the loop from what was heard alone: flow × (entering − leaving). */
function heardOut(spans: readonly Span[]): Heard {
  const flowing = spans.filter(({ record }) => record.dischargingW > 0);
  const heard = flowing.filter(
    ({ record }) =>
      record.loopFlowLPerMin !== null && record.enteringWaterC !== null && record.leavingWaterC !== null,
  );
  const hours = hoursOf(flowing);
  if (heard.length === 0 || !(hours > 0)) return { kwh: null, hoursPct: 0, recordedKwh: 0 };
  const kwh = energyKwh(
    heard,
    ({ loopFlowLPerMin, enteringWaterC, leavingWaterC }) =>
      ((loopFlowLPerMin ?? 0) / 60) * WATER_J_PER_L_K * ((enteringWaterC ?? 0) - (leavingWaterC ?? 0)),
  );
  return {
    kwh,
    hoursPct: (hoursOf(heard) / hours) * 100,
    recordedKwh: energyKwh(heard, (record) => record.dischargingW),
  };
}

/** The most likely culprit of a large residual, in words: what speaks plainly first, then where it arose. */
function culpritOf(residualKwh: number, parts: Residuals, heard: Heard, input: BalanceInput): string {
  const share = (part: number): number => part / residualKwh;
  if (share(-input.toldKwh) > 0.5)
    return 'what the owner told of the bank: the ice on hand was changed by that and by no heat';
  if (input.doubtfulMinutes > 15) return 'the clock, which was doubtful part of the night';
  if (share(parts.gaps) > 0.5) return 'the stretch without records, over which nothing was counted';
  const probe = input.probes.find(
    (one) => one.setAside !== null || Math.abs(one.errorAtIcePointK ?? 0) > PROBE_SUSPECT_K,
  );
  if (probe) {
    return probe.setAside === null
      ? `${probe.point}, which is ${probe.errorAtIcePointK?.toFixed(1)} K off at the ice point`
      : `${probe.point}, which was set aside (${probe.setAside})`;
  }
  const flowSays = heard.kwh === null ? 0 : heard.kwh - heard.recordedKwh;
  if (
    heard.recordedKwh > 0 &&
    Math.abs(flowSays) > FLOW_SUSPECT * heard.recordedKwh &&
    flowSays * residualKwh > 0
  ) {
    return 'the loop: heard flow and temperatures tell another heat than was counted; look at the flow meter and the pair of thermometers';
  }
  return culpritByMode(residualKwh > 0, parts, share);
}

function culpritByMode(lost: boolean, parts: Residuals, share: (part: number) => number): string {
  if (share(parts.charging) > 0.5) {
    return lost
      ? 'the ice machine, which makes less than is counted: dirty condenser, low refrigerant, or its plug reads high'
      : 'the ice machine, which makes more than is counted, or its plug reads low';
  }
  if (share(parts.discharging) > 0.5) {
    return lost
      ? 'the loop, which brought more heat than is counted: flow above the set figure, or a thermometer beside the stream'
      : 'the loop, which brought less heat than is counted: flow below the set figure, a tired pump or air in the loop';
  }
  if (share(parts.resting) > 0.5) {
    return lost
      ? 'the leak, larger than learned: lid, wet insulation, or a loop that creeps while the pump is off'
      : 'the leak, smaller than learned, or bank-surround reads high';
  }
  return 'nothing single: it arose through the whole night, so the ice estimate itself; a full melt-out or freeze anchors it';
}

function sentenceFor(
  verdict: Balance['verdict'],
  residualKwh: number,
  pct: number | null,
  uncertaintyKwh: number,
  culprit: string,
  show: Display,
): string {
  if (pct === null) return 'Too little heat moved for a balance.';
  const amount = `${show.heat(Math.abs(residualKwh))} ${show.heatUnit} (${Math.abs(pct).toFixed(1)} % of throughput)`;
  const what = `${amount} of cold ${residualKwh > 0 ? 'went unaccounted' : 'came unaccounted'}`;
  if (verdict === 'closes') return `The balance closes to ${amount}.`;
  if (verdict === 'within-estimate') {
    return `${what}, within the ${show.heat(uncertaintyKwh)} ${show.heatUnit} that the ice estimate leaves open; first to look at: ${culprit}.`;
  }
  return `${what}; most likely ${culprit}.`;
}
