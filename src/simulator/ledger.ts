/** Heat and water that crossed the truth model's borders, summed apart from its states, to audit them. */
import type { Cabin } from './cabin.ts';
import type { IceBank } from './bank.ts';

export interface Balance {
  /** What the bank's enthalpy change and its flows leave unexplained, in % of the heat that passed through it. */
  readonly energyResidualPct: number;
  /** The same for water in bank and rooms, in % of the water that moved (or of a thousandth of the bank's). */
  readonly waterResidualPct: number;
  /** Rooms: change of stored heat against everything that crossed, in % of the heat that passed. */
  readonly cabinResidualPct: number;
  readonly parts: {
    readonly bankStoredKwh: number;
    readonly iceMadeKwh: number;
    readonly loopHeatKwh: number;
    readonly leakKwh: number;
    readonly evaporatedKg: number;
    readonly condensateKg: number;
    readonly cabinStoredKwh: number;
    readonly cabinGainedKwh: number;
  };
}

export class Ledger {
  iceMakingJ = 0;
  loopJ = 0;
  leakJ = 0;
  evaporatedKg = 0;
  condensateKg = 0;
  deliveredJ = 0;
  latentJ = 0;
  /** Into the rooms other than by the coil: envelope, sun, people, machines. */
  cabinJ = 0;
  cabinThroughJ = 0;
  cabinKg = 0;
  cabinThroughKg = 0;
  /** Loop pipes, fittings and the pump between bank and coil. */
  pipeGainJ = 0;
  private bankThroughJ = 0;
  private readonly bankStartJ: number;
  private readonly bankStartKg: number;
  private readonly cabinStartJ: number;
  private readonly cabinStartKg: number;

  constructor(bank: IceBank, cabin: Cabin) {
    this.bankStartJ = bank.enthalpyJ();
    this.bankStartKg = bank.totalKg();
    this.cabinStartJ = cabin.enthalpyJ();
    this.cabinStartKg = cabin.moistureKg();
  }

  bankStep(bank: IceBank): void {
    this.iceMakingJ += bank.coilJ;
    this.loopJ += bank.loopJ;
    this.leakJ += bank.leakJ;
    this.evaporatedKg += bank.evaporatedKg;
    this.bankThroughJ += Math.abs(bank.coilJ) + Math.abs(bank.loopJ) + Math.abs(bank.leakJ);
  }

  cabinStep(heatJ: number, waterKg: number): void {
    this.cabinJ += heatJ;
    this.cabinThroughJ += Math.abs(heatJ);
    this.cabinKg += waterKg;
    this.cabinThroughKg += Math.abs(waterKg);
  }

  balance(bank: IceBank, cabin: Cabin, vapourJPerKg: number): Balance {
    const bankJ = bank.enthalpyJ() - this.bankStartJ;
    const bankInJ = this.loopJ + this.leakJ - this.iceMakingJ - this.evaporatedKg * vapourJPerKg;
    const cabinJ = cabin.enthalpyJ() - this.cabinStartJ;
    const bankKg = bank.totalKg() - this.bankStartKg;
    const cabinKg = cabin.moistureKg() - this.cabinStartKg;
    const waterGapKg = Math.abs(bankKg + this.evaporatedKg) + Math.abs(cabinKg - this.cabinKg);
    return {
      energyResidualPct: (100 * Math.abs(bankJ - bankInJ)) / Math.max(1, this.bankThroughJ),
      waterResidualPct: (100 * waterGapKg) / Math.max(1e-3 * this.bankStartKg, this.cabinThroughKg),
      cabinResidualPct: (100 * Math.abs(cabinJ - this.cabinJ)) / Math.max(1, this.cabinThroughJ),
      parts: {
        bankStoredKwh: bankJ / 3.6e6,
        iceMadeKwh: this.iceMakingJ / 3.6e6,
        loopHeatKwh: this.loopJ / 3.6e6,
        leakKwh: this.leakJ / 3.6e6,
        evaporatedKg: this.evaporatedKg,
        condensateKg: this.condensateKg,
        cabinStoredKwh: cabinJ / 3.6e6,
        cabinGainedKwh: this.cabinJ / 3.6e6,
      },
    };
  }
}
