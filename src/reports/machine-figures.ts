/**
 * How hard the ice machine works for its ice, led back to the catalogue. The coolant tells what drives the heat out of the bank,
 * the plug what that takes; both hardly depend on how much ice there is while it is thin, so no estimate is in them.
 */
import type { SiteConfig } from '../config.ts';
import type { CycleRecord } from '../record.ts';
import { MINUTE_MS } from '../time.ts';
import { carnotAt } from './carnot.ts';
import { meanOver, type Span } from './spans.ts';
import { longestAt, steadyOf, type Steady } from './steady.ts';

/**
 * Change of refrigerating capacity with evaporating and with outdoor temperature. Saturated R-134a vapour goes from 6.8 kg/m³ at
 * −20 °C to 14.4 at 0 °C, 3.8 % a kelvin, its latent heat falls by 0.3 %; liquid comes 1.35 kJ/kg warmer for each
 * kelvin of condensing, of some 150 kJ/kg (tables of the refrigerant, from memory). Other refrigerants differ by tenths.
 */
const [PER_K_EVAPORATING, PER_K_OUTDOOR] = [0.036, -0.009];
/** The coolant needs a while to settle after a start. */
const SETTLED_MS = 20 * MINUTE_MS;
/** Warmer coolant than this is outside a low-temperature machine's catalogue; its valve then holds it back (common practice, no source). */
const CATALOGUE_UP_TO_C = -3;

/** Heat that the catalogue's machine would take from the bank, W; null where the catalogue ends or coolant or outdoor air was not heard. */
export function catalogueW(site: SiteConfig, { coolantSupplyC, outdoorC }: CycleRecord): number | null {
  if (coolantSupplyC === null || outdoorC === null || coolantSupplyC > CATALOGUE_UP_TO_C) return null;
  const { iceMakingW, ratedEvaporatingC, ratedOutdoorC } = site.chiller;
  return (
    iceMakingW *
    Math.exp(
      PER_K_EVAPORATING * (coolantSupplyC - ratedEvaporatingC) + PER_K_OUTDOOR * (outdoorC - ratedOutdoorC),
    )
  );
}

export interface MachineFigures {
  readonly coolant: Steady | null;
  readonly power: Steady | null;
  readonly coolantC: number | null;
  readonly outdoorC: number | null;
}

/** Of the night's last long charge. */
export function machineFigures(site: SiteConfig, charge: readonly Span[]): MachineFigures {
  const startMs = charge.at(0)?.fromMs ?? 0;
  const settled = charge.filter((span) => span.fromMs - startMs >= SETTLED_MS);
  return {
    // it falls only at the end, where the ice grows together, and rises only from water without ice
    coolant: longestAt(
      settled.flatMap(({ record: { atMs, coolantSupplyC } }) =>
        coolantSupplyC !== null && coolantSupplyC < CATALOGUE_UP_TO_C
          ? [{ atMs, value: -coolantSupplyC }]
          : [],
      ),
    ),
    power: steadyOf(
      settled.flatMap(({ record }) => {
        const value = powerAtRating(site, record);
        return value === null ? [] : [{ atMs: record.atMs, value }];
      }),
    ),
    coolantC: meanOver(settled, (record) => record.coolantSupplyC),
    outdoorC: meanOver(settled, (record) => record.outdoorC),
  };
}

/** Power led back to the rating by the catalogue's capacity over Carnot's COP. */
function powerAtRating(site: SiteConfig, record: CycleRecord): number | null {
  const { chillerPowerW, outdoorC } = record;
  if (chillerPowerW === null || outdoorC === null) return null;
  const { ratedEvaporatingC, ratedOutdoorC, iceMakingW } = site.chiller;
  const evaporatingC = record.coolantSupplyC ?? ratedEvaporatingC;
  const capacityW = catalogueW(site, { ...record, coolantSupplyC: evaporatingC });
  if (capacityW === null) return null;
  const cop = carnotAt(evaporatingC, outdoorC) / carnotAt(ratedEvaporatingC, ratedOutdoorC);
  return (chillerPowerW * cop * iceMakingW) / capacityW;
}
