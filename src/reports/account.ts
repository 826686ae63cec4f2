/**
 * The bank's energy account of a night. Cold is counted: what the machine took out comes in, what the loop and the leak
 * brought in goes out. Ice at both ends comes from the estimate, the fluxes from the records, so the residual is
 * what the estimate had to correct: cold that no flux accounts for. It is named, not spread.
 */
import type { SiteConfig } from '../config.ts';
import type { Mode } from '../commands.ts';
import type { CycleRecord } from '../record.ts';
import { formatInstant, type Night } from '../time.ts';
import { culpritOf, type Culprit, type Evidence, type Step } from './culprit.ts';
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
/** A residual of a pound of ice is no matter, whatever the percentage of a night on which little happened. */
const LEAST_RESIDUAL_KWH = 0.05;
/** Below this throughput a percentage says nothing. */
const LEAST_THROUGHPUT_KWH = 0.5;

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

/** The mass of the ice itself: less than its cold would be as ice, because the water holds cold too. */
export function iceItself({ ice }: Pick<NightSheet, 'ice'>, show: Display): string {
  return `Ice itself: ${show.mass(ice.startKg)} ${show.massUnit} at the start, ${show.mass(ice.endKg)} at the end; the rest is cold water.`;
}

type Balance = NightSheet['balance'];
type Residuals = Balance['whileKwh'];

export interface BalanceInput {
  readonly site: SiteConfig;
  readonly spans: readonly Span[];
  readonly start: IceState;
  readonly night: Night;
  readonly probes: readonly ProbeState[];
  readonly learned: Evidence['learned'];
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
  const steps = stepsOf(spans, start, site);
  const whileKwh = residualsByMode(steps);
  const heard = heardOut(spans);
  const verdict = verdictOf(residualPct, residualKwh, uncertaintyKwh);
  const culprit =
    verdict === 'closes' || verdict === 'unknown'
      ? null
      : culpritOf({
          ...input,
          residualKwh,
          inKwh,
          outKwh,
          leakKwh,
          parts: whileKwh,
          steps,
          heardOut: heard.kwh === null ? null : { heardKwh: heard.kwh, countedKwh: heard.recordedKwh },
        });
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
    culprit: culprit?.words ?? '',
    sentence: sentenceFor(verdict, residualKwh, residualPct, uncertaintyKwh, culprit, input.show),
  };
}

function halfWidth(state: IceState): number {
  return Math.max(0, state.highKwh - state.lowKwh) / 2;
}

function verdictOf(pct: number | null, residualKwh: number, uncertaintyKwh: number): Balance['verdict'] {
  if (pct === null) return 'unknown';
  if (Math.abs(pct) <= LARGE_PCT || Math.abs(residualKwh) < LEAST_RESIDUAL_KWH) return 'closes';
  return Math.abs(residualKwh) <= uncertaintyKwh ? 'within-estimate' : 'open';
}

function sideOf(mode: Mode): 'charging' | 'discharging' | 'resting' {
  if (mode === 'charging' || mode === 'charging-while-discharging') return 'charging';
  return mode === 'discharging' ? 'discharging' : 'resting';
}

/** Each step's own residual. */
function stepsOf(spans: readonly Span[], start: IceState, site: SiteConfig): Step[] {
  let cold = start.kwh + start.pastUseKwh;
  return spans.map((span) => {
    const fluxKwh = (netW(span.record) * span.hours) / 1000;
    const now = span.record.iceOnHandKwh + pastUseKwh(span.record, site);
    const kwh = fluxKwh - (now - cold);
    cold = now;
    return { span, kwh };
  });
}

/** Gathered by what the plant did in each step; steps over a gap apart. */
function residualsByMode(steps: readonly Step[]): Residuals {
  const out = { charging: 0, discharging: 0, resting: 0, gaps: 0 };
  let endMs = steps[0].span.fromMs;
  for (const { span, kwh } of steps) {
    const overGap = span.fromMs - endMs > span.record.spanMs;
    out[overGap ? 'gaps' : sideOf(span.record.mode)] += kwh;
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

function sentenceFor(
  verdict: Balance['verdict'],
  residualKwh: number,
  pct: number | null,
  uncertaintyKwh: number,
  culprit: Culprit | null,
  show: Display,
): string {
  if (pct === null) return 'Too little heat moved for a balance.';
  const amount = `${show.heat(Math.abs(residualKwh))} ${show.heatUnit} (${Math.abs(pct).toFixed(1)} % of throughput)`;
  const what = `${amount} of cold ${residualKwh > 0 ? 'went unaccounted' : 'came unaccounted'}`;
  if (verdict === 'closes' || culprit === null) return `The balance closes to ${amount}.`;
  const within = `, within the ${show.heat(uncertaintyKwh)} ${show.heatUnit} that the ice estimate leaves open`;
  const lead = culprit.named
    ? verdict === 'within-estimate'
      ? 'first to look at: '
      : 'most likely '
    : 'nothing single stands out: ';
  return `${what}${verdict === 'within-estimate' ? within : ''}; ${lead}${culprit.words}.`;
}
