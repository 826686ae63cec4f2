/**
 * The ice machine as a fraction of Carnot, anchored at the nameplate. Evaporating temperature comes from the balance
 * capacity = conductance through the ice × (bank − evaporating), condensing from outdoor air plus a pinch; so both
 * capacity and COP fall through a charge and on a hot afternoon.
 */
import type { SiteConfig } from '../config.ts';
import { bankModel, freezeConductanceWPerK } from './bank.ts';

/** Condensing above outdoor air, K: common practice for small air-cooled units, no source. */
const CONDENSER_PINCH_K = 12;

/**
 * Capacity lost for each kelvin of evaporating temperature and gained for each of condensing, as fractions of the
 * rating. The published low-temperature R-22 compressor polynomial (public data set of compressor curves) has
 * 10,030 W at −20/35 °C against 5,882 W at −30/40 °C: 0.041 per K with 0.01 for condensing;
 * at ice-making temperatures the relative slope is smaller, as vapour density is higher.
 */
const CAPACITY_PER_EVAPORATING_K = 0.036;
const CAPACITY_PER_CONDENSING_K = 0.009;

/**
 * How the share of Carnot moves with either temperature, as fractions of the rating's: the same polynomial reaches
 * 0.554 of Carnot at −20/35 °C, 0.535 at −25/35 and 0.562 at −20/40.
 */
const SHARE_PER_EVAPORATING_K = 0.0068;
const SHARE_PER_CONDENSING_K = 0.003;

const KELVIN = 273.15;
/** The polynomial's lowest suction temperature; the balance is held above it. */
const LEAST_EVAPORATING_C = -38;

export interface MachineBalance {
  readonly evaporatingC: number;
  readonly iceMakingW: number;
  readonly powerW: number;
}

export interface IceMachineModel {
  /** Balance against a conductance from coolant to the freezing front (or water) at `bankC`. */
  balance(outdoorC: number, freezeWPerK: number, bankC: number): MachineBalance;
  /** Heat moved for each unit of electrical energy at given temperatures. */
  cop(evaporatingC: number, outdoorC: number): number;
  /** Evaporating temperature at the balance, °C. */
  evaporatingC(outdoorC: number, freezeWPerK: number, bankC: number): number;
  /** Steady ice making at an inventory (0–100 %). */
  operate(outdoorC: number, inventoryPct: number): { iceMakingW: number; powerW: number };
}

export function iceMachine(config: SiteConfig): IceMachineModel {
  const { chiller } = config;
  const bank = bankModel(config);
  const rated = {
    evaporatingC: chiller.ratedEvaporatingC,
    condensingC: chiller.ratedOutdoorC + CONDENSER_PINCH_K,
  };
  const share = chiller.iceMakingW / chiller.powerW / carnot(rated.evaporatingC, rated.condensingC);
  const restKPerW = evaporatorKPerW(chiller.iceMakingW, rated.evaporatingC, bank.config.freezeWPerK);

  const evaporatingC = (outdoorC: number, freezeWPerK: number, bankC: number): number => {
    const atCondensing =
      chiller.iceMakingW * Math.max(0.2, 1 - CAPACITY_PER_CONDENSING_K * (outdoorC - chiller.ratedOutdoorC));
    const slopeW = atCondensing * CAPACITY_PER_EVAPORATING_K;
    const conductance = 1 / (restKPerW + 1 / freezeWPerK);
    // conductance·(bank − e) = atCondensing + slope·(e − rated)
    const e = (conductance * bankC - atCondensing + slopeW * rated.evaporatingC) / (conductance + slopeW);
    return Math.max(LEAST_EVAPORATING_C, Math.min(e, 12));
  };
  const cop = (evaporating: number, outdoorC: number): number => {
    const condensing = outdoorC + CONDENSER_PINCH_K;
    const slipped =
      1 +
      SHARE_PER_EVAPORATING_K * (evaporating - rated.evaporatingC) +
      SHARE_PER_CONDENSING_K * (condensing - rated.condensingC);
    return share * Math.max(0.4, slipped) * carnot(evaporating, condensing);
  };
  const balance = (outdoorC: number, freezeWPerK: number, bankC: number): MachineBalance => {
    const e = evaporatingC(outdoorC, freezeWPerK, bankC);
    const iceMakingW = Math.max(0, (bankC - e) / (restKPerW + 1 / freezeWPerK));
    return { evaporatingC: e, iceMakingW, powerW: iceMakingW / cop(e, outdoorC) };
  };
  return {
    balance,
    cop,
    evaporatingC,
    operate: (outdoorC, inventoryPct) => {
      const { iceMakingW, powerW } = balance(outdoorC, freezeConductanceWPerK(bank, inventoryPct / 100), 0);
      return { iceMakingW, powerW };
    },
  };
}

/** Carnot COP of cooling; the lift is held above 8 K, where the form has no meaning any more. */
function carnot(evaporatingC: number, condensingC: number): number {
  return (evaporatingC + KELVIN) / Math.max(8, condensingC - evaporatingC);
}

/**
 * Resistance between refrigerant and coolant, K/W, such that the balance with a bare coil is the nameplate's. A site
 * file whose coil alone is too poor for the nameplate gets next to none: the nameplate then holds only roughly.
 */
function evaporatorKPerW(iceMakingW: number, evaporatingC: number, freezeWPerK: number): number {
  return Math.max(0.05 / freezeWPerK, -evaporatingC / iceMakingW - 1 / freezeWPerK);
}
