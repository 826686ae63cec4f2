/** The terms of a contract for grid electricity, as the bill and the prices read them. */
import type { SiteConfig, TariffConfig } from '../config.ts';

/** An addition to every price for the month's energy above a threshold. Sorted or not; each holds above its own. */
export type Block = TariffConfig['blocks'][number];

/** The zone of the meter's clock. */
export function meterZone(config: SiteConfig): string {
  return config.power.tariff?.zone ?? config.site.zone;
}

/** What the month's blocks add to the price of the next kWh. */
export function blockAdds(blocks: readonly Block[], monthKwhSoFar: number): number {
  return blocks.reduce((sum, block) => sum + (monthKwhSoFar >= block.aboveKwh ? block.adds : 0), 0);
}
