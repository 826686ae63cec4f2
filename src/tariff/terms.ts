/** The terms of a contract for grid electricity, as the bill and the prices read them. */
import type { SiteConfig, TariffConfig } from '../config.ts';

/** An addition to every price for the month's energy above a threshold. Sorted or not; each holds above its own. */
export interface Block {
  readonly aboveKwh: number;
  readonly adds: number;
}

/** What a bill may carry beside energy and demand; nothing of it moves a marginal price but the blocks. */
export interface BillTerms {
  readonly fixedPerMonth?: number;
  readonly fixedPerDay?: number;
  readonly blocks?: readonly Block[];
}

export type TariffTerms = TariffConfig & BillTerms;

/** The zone of the meter's clock. */
export function meterZone(config: SiteConfig): string {
  return config.power.tariff?.zone ?? config.site.zone;
}
