/**
 * What a large residual most likely comes from. A residual is what the estimate had to correct, so where it arose says when the
 * correction came, not what was wrong: only one that grows steadily in one mode speaks of that mode. A correction made at
 * once, such as when the bank runs out, may be due to anything counted since the last one; then what the instruments
 * leave open is the best that can be said, and where that leaves nothing single, it is said.
 */
import type { SiteConfig } from '../config.ts';
import { formatInstant, MINUTE_MS } from '../time.ts';
import type { ProbeState } from './coverage.ts';
import type { Display } from './display.ts';
import type { NightSheet } from './night-schema.ts';
import { grouped } from './grouped.ts';
import type { Span } from './spans.ts';

/** Residual of one step of the night. */
export interface Step {
  readonly span: Span;
  readonly kwh: number;
}

export interface Culprit {
  /** Whether something single stands out. */
  readonly named: boolean;
  readonly words: string;
}

export interface Evidence {
  readonly site: SiteConfig;
  readonly residualKwh: number;
  readonly inKwh: number;
  readonly outKwh: number;
  readonly leakKwh: number;
  readonly parts: NightSheet['balance']['whileKwh'];
  readonly steps: readonly Step[];
  /** Heat brought in as heard and as counted over the same hours; null where it was not heard. */
  readonly heardOut: { readonly heardKwh: number; readonly countedKwh: number } | null;
  readonly probes: readonly ProbeState[];
  readonly learned: readonly { readonly name: string; readonly value: number; readonly sd: number | null }[];
  readonly doubtfulMinutes: number;
  readonly toldKwh: number;
  readonly show: Display;
}

/** Share of the residual that one thing must explain to be named. */
const MOST = 0.5;
/** A correction that comes within this time came at once. */
const AT_ONCE_MS = 30 * MINUTE_MS;
/** What is left open where nothing was learned, one standard deviation, as a part (common practice, no source): nameplate, coil model, leak. */
const OPEN = { made: 0.15, coil: 0.25, flow: 0.2, meter: 0.025, leak: 0.3, surround: 0.1 } as const;
/** Two one-wire thermometers of ±0.5 K against each other: 0.5 / √3 · √2. */
const PAIR_K = 0.41;
const WATER_W_PER_K_PER_L_MIN = 4205 / 60;
/** The owner is not troubled with less than this. */
const WORTH_KWH = 0.1;

export function culpritOf(evidence: Evidence): Culprit {
  const plain = plainOf(evidence);
  if (plain !== null) return { named: true, words: plain };
  const jump = jumpOf(evidence);
  if (jump !== null) return { named: false, words: `${jump}; ${openWords(evidence)}` };
  const steady = steadyMode(evidence);
  if (steady !== null) return { named: true, words: steady };
  return { named: false, words: `it arose through the whole night; ${openWords(evidence)}` };
}

/** What needs no inference. */
function plainOf(evidence: Evidence): string | null {
  const { residualKwh, parts, toldKwh, doubtfulMinutes, probes, heardOut } = evidence;
  if (-toldKwh / residualKwh > MOST)
    return 'what the owner told of the bank: the ice on hand was changed by that and by no heat';
  if (doubtfulMinutes > 15) return 'the clock, which was doubtful part of the night';
  if (parts.gaps / residualKwh > MOST) return 'the stretch without records, over which nothing was counted';
  const aside = probes.find((one) => one.setAside !== null);
  if (aside) return `${aside.point}, which was set aside (${aside.setAside})`;
  const loop = heardOut === null ? 0 : (heardOut.heardKwh - heardOut.countedKwh) / residualKwh;
  if (loop > MOST && loop < 1 / MOST)
    return 'the loop: heard flow and temperatures tell another heat than was counted; look at the flow meter and the pair of thermometers';
  return null;
}

/** When most of it was corrected at once; null when it was not. */
function jumpOf({ steps, residualKwh, show }: Evidence): string | null {
  const halves = grouped(steps, ({ span }) => Math.floor((span.toMs - 1) / (AT_ONCE_MS / 2)));
  const kwhOf = (half: number): number => (halves.get(half) ?? []).reduce((sum, step) => sum + step.kwh, 0);
  for (const [half, inside] of halves) {
    const kwh = kwhOf(half - 1) + kwhOf(half);
    if (!(kwh / residualKwh > MOST)) continue;
    const at = show.clock(formatInstant(inside[inside.length - 1].span.toMs));
    return `the estimate was put right by ${show.heat(Math.abs(kwh))} ${show.heatUnit} by ${at}, so what it had counted before was off`;
  }
  return null;
}

/** The mode in which most of it grew little by little. */
function steadyMode({ parts, residualKwh }: Evidence): string | null {
  const lost = residualKwh > 0;
  if (parts.charging / residualKwh > MOST) {
    return lost
      ? 'the ice machine, which makes less than is counted: dirty condenser, low refrigerant, or its plug reads high'
      : 'the ice machine, which makes more than is counted, or its plug reads low';
  }
  if (parts.discharging / residualKwh > MOST) {
    return lost
      ? 'the loop, which brought more heat than is counted: flow above the set figure, or a thermometer beside the stream'
      : 'the loop, which brought less heat than is counted: flow below the set figure, a tired pump or air in the loop';
  }
  if (parts.resting / residualKwh > MOST) {
    return lost
      ? 'the leak, larger than learned: lid, wet insulation, or a loop that creeps while the pump is off'
      : 'the leak, smaller than learned, or bank-surround reads high';
  }
  return null;
}

interface Open {
  readonly what: string;
  readonly kwh: number;
}

/** By how much each sum may be off, with the instruments there are and with what was learned. */
function openOf(evidence: Evidence): Open[] {
  const { site, inKwh, outKwh, leakKwh } = evidence;
  const surround = 'bank-surround' in site.points ? 0 : OPEN.surround;
  const opens = [
    { what: 'the ice made', kwh: inKwh * learnedPart(evidence, 'charging-factor', OPEN.made) },
    { what: 'the heat of the loop', kwh: loopOpenKwh(evidence, outKwh) },
    {
      what: 'the leak',
      kwh: leakKwh * Math.hypot(surround, learnedPart(evidence, 'heat-leak', OPEN.leak)),
    },
  ];
  return opens.filter((one) => one.kwh >= WORTH_KWH).toSorted((a, b) => b.kwh - a.kwh);
}

function loopOpenKwh(evidence: Evidence, outKwh: number): number {
  const { site, steps } = evidence;
  if (!('entering-water' in site.points)) return outKwh * OPEN.coil;
  const metered = 'loop-flow' in site.points;
  const flowPart = metered ? OPEN.meter : learnedPart(evidence, 'pump-flow', OPEN.flow);
  const hours = steps.reduce((sum, { span }) => sum + (span.record.dischargingW > 0 ? span.hours : 0), 0);
  const pairKwh = (site.delivery.flowLPerMin * WATER_W_PER_K_PER_L_MIN * PAIR_K * hours) / 1000;
  return Math.hypot(outKwh * flowPart, pairKwh);
}

function learnedPart({ learned }: Evidence, name: string, otherwise: number): number {
  const one = learned.find((figure) => figure.name === name);
  return one === undefined || one.sd === null || !(one.value > 0) ? otherwise : one.sd / one.value;
}

function openWords(evidence: Evidence): string {
  const { show } = evidence;
  const opens = openOf(evidence);
  if (opens.length === 0) return 'nothing that is counted is known to be this far off';
  const each = opens.map(({ what, kwh }) => `${what} by ${show.heat(kwh)}`);
  return `by what the instruments leave open, ${each.join(', ')} ${show.heatUnit} either way`;
}
