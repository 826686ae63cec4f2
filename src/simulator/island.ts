/** A site with no grid: panels, battery with its charger, and a generator that starts by itself when the battery is low. */
import type { IslandConfig } from '../config.ts';
import { localMinuteOfDay } from '../time.ts';

/** Panels: soiling, wiring, inverter; loss by warm cells for each kelvin above 25 °C. Common practice, no source. */
const PANEL_PART = 0.86;
const LOSS_PER_K = 0.004;
/** Cells above the air at full sun, K. */
const CELL_RISE_K = 28;
/** One way through the battery. */
const BATTERY_PART = 0.96;
const GENERATOR_STOPS_PCT = 70;

type Battery = NonNullable<IslandConfig['battery']>;

export class Island {
  readonly config: IslandConfig;
  chargeKwh: number;
  /** Power at the panels' terminals after what had to be curtailed. */
  panelW = 0;
  generatorW = 0;
  curtailedW = 0;
  /** False while neither battery nor generator nor sun can carry the load. */
  powered = true;
  private readonly zone: string;
  private availableW = 0;
  private generatorS = 0;
  private generatorOn = false;
  private quiet = false;

  constructor(config: IslandConfig, zone: string) {
    this.config = config;
    this.zone = zone;
    this.chargeKwh = 0.7 * (config.battery?.capacityKwh ?? 0);
  }

  chargePct(): number {
    const capacity = this.config.battery?.capacityKwh ?? 0;
    return capacity > 0 ? (100 * this.chargeKwh) / capacity : 0;
  }

  /** Now and then: sunshine on the panels' plane, and whether the generator must be silent. */
  look(atMs: number, planeWPerM2: number, outdoorC: number): void {
    const cellC = outdoorC + (CELL_RISE_K * planeWPerM2) / 1000;
    const part = PANEL_PART * (1 - LOSS_PER_K * (cellC - 25));
    this.availableW = Math.max(0, this.config.panelsW * (planeWPerM2 / 1000) * part);
    const generator = this.config.generator;
    if (!generator) return;
    const minute = localMinuteOfDay(this.zone, atMs);
    const from = minutes(generator.quietFrom);
    const to = minutes(generator.quietTo);
    this.quiet = from <= to ? minute >= from && minute < to : minute >= from || minute < to;
  }

  step(dtS: number, loadW: number): void {
    this.runGenerator(dtS);
    const battery = this.config.battery;
    const fromGenerator = this.generatorOn ? (this.config.generator?.powerW ?? 0) : 0;
    const spareW = this.availableW + fromGenerator - loadW;
    const chargeW = battery ? this.takeOrGive(battery, dtS, spareW) : 0;
    const leftW = spareW - chargeW;
    this.powered = leftW >= -1;
    this.curtailedW = Math.max(0, Math.min(this.availableW, leftW));
    this.panelW = this.availableW - this.curtailedW;
    this.generatorW = Math.max(0, fromGenerator - Math.max(0, leftW - this.curtailedW));
  }

  /** Power into the battery (negative out of it) within its limits and content, W. */
  private takeOrGive(battery: Battery, dtS: number, spareW: number): number {
    const { capacityKwh, mostChargeW, mostDischargeW } = battery;
    const perW = dtS / 3.6e6;
    if (spareW > 0) {
      const roomW = (capacityKwh - this.chargeKwh) / perW / BATTERY_PART;
      const inW = Math.min(spareW, mostChargeW, roomW);
      this.chargeKwh += inW * perW * BATTERY_PART;
      return inW;
    }
    const outW = Math.min(-spareW, mostDischargeW, (this.chargeKwh / perW) * BATTERY_PART);
    this.chargeKwh = Math.max(0, this.chargeKwh - (outW * perW) / BATTERY_PART);
    return -outW;
  }

  private runGenerator(dtS: number): void {
    const { generator, battery } = this.config;
    if (!generator) return;
    const pct = this.chargePct();
    const low = battery ? pct < battery.floorPct - 8 : !this.powered;
    if (this.generatorOn) {
      this.generatorS += dtS;
      const ranEnough = this.generatorS * 1000 >= generator.minRunMs;
      if (this.quiet || (ranEnough && pct >= GENERATOR_STOPS_PCT)) this.generatorOn = false;
    } else if (low && !this.quiet) {
      this.generatorOn = true;
      this.generatorS = 0;
    }
  }
}

const minutes = (clock: string): number => Number(clock.slice(0, 2)) * 60 + Number(clock.slice(3));
