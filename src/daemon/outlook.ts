/** What a plan takes from outside: a forecast, dated prices, what the meter has counted so far. */
import type { Outlook } from '../cycle-values.ts';
import { sentenceOf } from '../errors.ts';
import { parseDatedPrices, type DatedPrice } from '../tariff/dated.ts';
import { Meter } from './meter.ts';
import type { DaemonParts } from './ports.ts';

export class OutlookSource {
  readonly #parts: DaemonParts;
  readonly #meter: Meter;
  #heard: { readonly atMs: number; readonly prices: readonly DatedPrice[] } = {
    atMs: Number.NaN,
    prices: [],
  };

  constructor(parts: DaemonParts) {
    this.#parts = parts;
    this.#meter = new Meter(parts.config, parts.store);
  }

  at(nowMs: number): Outlook {
    const { intake, stopwatch, config } = this.#parts;
    return {
      outdoorForecast: intake.forecast()?.value ?? null,
      datedPrices: this.#prices(config.site.currency),
      ...this.#meter.at(nowMs),
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
}
