/** What each instrument would read for a state of the bank: the sensing side of the model. */
import { levelRiseMm } from '../plant/bank.ts';
import type { Sense } from './filter.ts';
import { COOLANT_RISE_K, LAYERS, PROBE_OFFSET, X, type ProbePoint } from './layout.ts';
import { iceKgOf, chargingWOf, facedC, freezeWPerKOf, type Drive, type PlantModels } from './models.ts';

const water = (point: ProbePoint, layers: readonly number[]): Sense => {
  const offset = PROBE_OFFSET[point];
  return {
    states: [...layers, offset],
    predict: (x) => layers.reduce((sum, i) => sum + x[i], 0) / layers.length + x[offset],
  };
};

export interface Senses {
  readonly water: Readonly<Partial<Record<ProbePoint, Sense>>>;
  readonly level: Sense;
  readonly ice: Sense;
  readonly flow: Sense;
  coolant(point: 'coolant-supply' | 'coolant-return', drive: Drive): Sense;
  power(drive: Drive): Sense;
}

export function sensesOf(models: PlantModels): Senses {
  return {
    water: {
      'leaving-water': water('leaving-water', [X.out]),
      'bank-top': water('bank-top', [X.top]),
      'bank-middle': water('bank-middle', models.internal ? [X.top] : [X.upper, X.lower]),
      'bank-bottom': water('bank-bottom', [models.internal ? X.top : X.out]),
    },
    level: {
      states: [X.ice, X.firstLess, X.secondLess, X.thirdLess, X.levelZero],
      predict: (x) => x[X.levelZero] + levelRiseMm(models.bank, iceKgOf(models, x)),
    },
    ice: { states: [X.ice], predict: (x) => x[X.ice] },
    flow: { states: [X.flow], predict: (x) => x[X.flow] },
    coolant: (point, drive) => coolantSense(models, point, drive),
    power: (drive) => powerSense(models, drive),
  };
}

/**
 * Coolant round the freezing coil: colder than what it faces by heat over conductance, half its rise to either side.
 * Thickness of ice shows here, for it is an insulator.
 */
function coolantSense(models: PlantModels, point: 'coolant-supply' | 'coolant-return', drive: Drive): Sense {
  const offset = PROBE_OFFSET[point];
  const side = point === 'coolant-supply' ? -0.5 : 0.5;
  const risePerW = COOLANT_RISE_K / models.nominalIceMakingW;
  return {
    states: [
      X.ice,
      ...LAYERS,
      X.hollow,
      X.rim,
      X.cop,
      X.copIce,
      X.freeze,
      X.freezeNow,
      X.thickening,
      X.growth,
      X.span,
      offset,
    ],
    predict: (x) => {
      const heatW = chargingWOf(models, x, drive);
      const rise = side * risePerW * Math.exp(x[X.span]) * heatW;
      return facedC(models, x) - heatW / freezeWPerKOf(models, x) + rise + x[offset];
    },
  };
}

/** Electrical power of the running machine: falls or rises with the ice on the coil in a way that this plant repeats. */
function powerSense(models: PlantModels, drive: Drive): Sense {
  return {
    states: [
      X.ice,
      ...LAYERS,
      X.hollow,
      X.rim,
      X.power,
      X.powerIce,
      X.freeze,
      X.freezeNow,
      X.thickening,
      X.growth,
    ],
    predict: (x) => {
      const balance = models.machine.balance(
        drive.condenserAirC,
        freezeWPerKOf(models, x),
        facedC(models, x),
      );
      const learned = x[X.power] + x[X.powerIce] * (Math.min(1.2, Math.max(0, x[X.ice])) - 0.5);
      return Math.log(balance.powerW) + learned;
    },
  };
}
