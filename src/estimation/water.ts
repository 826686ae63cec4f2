/**
 * Water in four layers that the loop passes from the first to the last, with what it gives to ice on the way. Four
 * layers show how the front of warm water takes half an hour to pass, which one well-mixed body would hide.
 */
import { LAYERS } from './layout.ts';

/** What acts on the layers in one step. */
export interface Pull {
  readonly layerJPerK: number;
  /** Loop capacity rate, W/K, and what enters the first layer. */
  readonly loopWPerK: number;
  readonly enteringC: number;
  /** Conductance from each layer to what freezes or melts, and the temperature there. */
  readonly toIceWPerK: readonly number[];
  readonly iceC: readonly number[];
  /** Heat from elsewhere into each layer, W. */
  readonly otherW: number;
  readonly dtS: number;
}

export interface Passed {
  /** Heat that the loop brought in, W. */
  loopW: number;
  /** What went on to the ice from each layer, J: exactly what came in and is not found in the water. */
  readonly toIceJ: number[];
}

/** Moves the layers on in place, each by its own exponential; heat is conserved whatever the step. */
export function passLayers(x: Float64Array, pull: Pull, passed: Passed): void {
  const { layerJPerK, loopWPerK, dtS } = pull;
  let inC = pull.enteringC;
  for (let k = 0; k < LAYERS.length; k++) {
    const i = LAYERS[k];
    const before = x[i];
    const ice = pull.toIceWPerK[k];
    const total = loopWPerK + ice;
    const gainW = loopWPerK * inC + ice * pull.iceC[k] + pull.otherW;
    let mean: number;
    if (total > 1e-9) {
      const rate = (total * dtS) / layerJPerK;
      const kept = Math.exp(-rate);
      const leads = gainW / total;
      x[i] = leads + (before - leads) * kept;
      mean = leads + ((before - leads) * (1 - kept)) / rate;
    } else {
      x[i] = before + (gainW * dtS) / layerJPerK;
      mean = 0.5 * (before + x[i]);
    }
    passed.toIceJ[k] = (loopWPerK * (inC - mean) + pull.otherW) * dtS - layerJPerK * (x[i] - before);
    inC = mean;
  }
  passed.loopW = loopWPerK * (pull.enteringC - inC);
}

export function meanOf(x: Float64Array): number {
  return 0.25 * (x[LAYERS[0]] + x[LAYERS[1]] + x[LAYERS[2]] + x[LAYERS[3]]);
}

/** Adds the same to every layer. */
export function shift(x: Float64Array, byK: number): void {
  for (const i of LAYERS) x[i] += byK;
}

export function scale(x: Float64Array, by: number): void {
  for (const i of LAYERS) x[i] *= by;
}

/** Water is densest here, °C: colder and warmer water lies above it. */
const DENSEST_C = 4;

/** Lightness of water near its densest point goes as the square of the distance to it; brine only grows lighter. */
const lightness = (waterC: number, brine: boolean): number => (brine ? waterC : (waterC - DENSEST_C) ** 2);

/** Mixes neighbours until no layer lies on a lighter one. */
export function overturn(x: Float64Array, brine: boolean): void {
  for (let size = 1, k = 1; k < LAYERS.length; k++) {
    if (lightness(x[LAYERS[k - 1]], brine) >= lightness(x[LAYERS[k]], brine)) {
      size = 1;
      continue;
    }
    // The mixed body above takes this layer in, and may then be denser than what lies above it.
    let from = k - size;
    let mean = (x[LAYERS[k - 1]] * size + x[LAYERS[k]]) / (size + 1);
    while (from > 0 && lightness(x[LAYERS[from - 1]], brine) < lightness(mean, brine)) {
      mean = (mean * (k - from + 1) + x[LAYERS[from - 1]]) / (k - from + 2);
      from -= 1;
    }
    for (let j = from; j <= k; j++) x[LAYERS[j]] = mean;
    size = k - from + 1;
  }
}
