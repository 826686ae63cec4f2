/** What a plan takes from outside: a forecast, dated prices, the month's peak so far. */
import type { SiteConfig } from '../config.ts';
import type { Outlook } from '../cycle-values.ts';
import { sentenceOf } from '../errors.ts';
import { parseDatedPrices, type DatedPrice } from '../tariff/dated.ts';
import { demandSoFar, monthAt } from '../tariff/demand.ts';
import { energyBySlot } from '../tariff/energy.ts';
import { meterZone } from '../tariff/terms.ts';
import type { DaemonParts } from './ports.ts';

export class OutlookSource {
  readonly #parts: DaemonParts;
  #heard: { readonly atMs: number; readonly prices: readonly DatedPrice[] } = {
    atMs: Number.NaN,
    prices: [],
  };

  constructor(parts: DaemonParts) {
    this.#parts = parts;
  }

  at(nowMs: number): Outlook {
    const { intake, stopwatch, config } = this.#parts;
    return {
      outdoorForecast: intake.forecast()?.value ?? null,
      datedPrices: this.#prices(config.site.currency),
      demand: this.#demand(config, nowMs),
      stopwatch,
    };
  }

  /** Parsed once for each message; a message that cannot be read leaves the prices before it in force. */
  #prices(currency: string): readonly DatedPrice[] {
    const heard = this.#parts.intake.prices();
    if (heard === null || heard.heardMs === this.#heard.atMs) return this.#heard.prices;
    let { prices } = this.#heard;
    try {
      prices = parseDatedPrices(heard.value, currency);
    } catch (error) {
      this.#parts.log.warn({}, `${sentenceOf(error)} The prices before it stand.`);
    }
    this.#heard = { atMs: heard.heardMs, prices };
    return prices;
  }

  #demand(config: SiteConfig, nowMs: number): Outlook['demand'] {
    const { tariff } = config.power;
    if (!tariff?.demand) return null;
    const month = monthAt(meterZone(config), nowMs);
    const records = this.#parts.store.recordsBetween(month.startMs, nowMs);
    return demandSoFar(config, energyBySlot(records, tariff.demand.overMs), nowMs);
  }
}
