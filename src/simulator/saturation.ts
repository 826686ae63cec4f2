/** Saturated air at one pressure, tabulated from the moist-air formulas for use in the inner loop. */
import { saturationHumidityRatio } from '../physics/moist-air.ts';

const LOWEST_C = -30;
const HIGHEST_C = 70;
const STEPS_PER_K = 5;
/** Molar mass of water over that of dry air: ASHRAE Fundamentals 2017, ch. 1 eq. 20. */
const VAPOUR_TO_AIR = 0.621945;

export class SaturationTable {
  private readonly ratios: Float64Array;

  constructor(pressurePa: number) {
    const count = (HIGHEST_C - LOWEST_C) * STEPS_PER_K + 2;
    this.ratios = Float64Array.from({ length: count }, (_, i) =>
      saturationHumidityRatio(LOWEST_C + i / STEPS_PER_K, pressurePa),
    );
  }

  /** Humidity ratio of saturated air, kg/kg; linear in steps of 0.2 K, within 0.02 % of the formula. */
  ratio(airC: number): number {
    const at = Math.max(0, Math.min(this.ratios.length - 1.001, (airC - LOWEST_C) * STEPS_PER_K));
    const i = at | 0;
    return this.ratios[i] + (at - i) * (this.ratios[i + 1] - this.ratios[i]);
  }

  /** Relative humidity, %: the quotient of vapour pressures, p w/(0.621945 + w), written with humidity ratios. */
  humidityPct(airC: number, ratio: number): number {
    const most = this.ratio(airC);
    return Math.min(100, (100 * ratio * (VAPOUR_TO_AIR + most)) / (most * (VAPOUR_TO_AIR + ratio)));
  }

  /** Humidity ratio at a relative humidity, kg/kg; the inverse of `humidityPct`. */
  ratioAt(airC: number, rhPct: number): number {
    const most = this.ratio(airC);
    const part = (Math.max(0, Math.min(100, rhPct)) / 100) * (most / (VAPOUR_TO_AIR + most));
    return (VAPOUR_TO_AIR * part) / (1 - part);
  }

  /** Temperature at which a humidity ratio saturates, °C: the dew point. */
  dewPointC(ratio: number): number {
    return this.inverse(ratio, 0, 1);
  }

  /** Temperature at which `sensible · T + latent · w_s(T)` reaches a value; both slopes are positive. */
  inverse(value: number, sensible: number, latent: number): number {
    let low = 0;
    let high = this.ratios.length - 1;
    while (high - low > 1) {
      const middle = (low + high) >> 1;
      if (sensible * (LOWEST_C + middle / STEPS_PER_K) + latent * this.ratios[middle] < value) low = middle;
      else high = middle;
    }
    const lowC = LOWEST_C + low / STEPS_PER_K;
    const lowValue = sensible * lowC + latent * this.ratios[low];
    const highValue = sensible * (lowC + 1 / STEPS_PER_K) + latent * this.ratios[high];
    return lowC + (value - lowValue) / (highValue - lowValue) / STEPS_PER_K;
  }
}
