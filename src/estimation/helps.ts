/** Which missing instrument would narrow the interval most: each is tried on the present belief, on paper. */
import { POINTS, type PointName } from '../points.ts';
import { levelRiseMm } from '../plant/bank.ts';
import type { Belief } from './filter.ts';
import { X } from './layout.ts';
import { freezeWPerKOf, type PlantModels } from './models.ts';
import { onHandSlopes, shared, type Slope } from './report.ts';

interface Trial {
  readonly point: PointName;
  /** Sensitivity of its reading to the state, and the noise variance of some hours of readings. */
  readonly gradient: Slope;
  readonly noise: number;
}

/** Narrowing of the deviation below which an instrument is not worth naming. */
const WORTH_NAMING = 0.01;

function trials(models: PlantModels, belief: Belief): Trial[] {
  const fullMm = levelRiseMm(models.bank, models.bank.mostIceKg);
  const freeze = freezeWPerKOf(models, belief.mean);
  const heatW = models.nominalIceMakingW;
  const thicker = Math.exp(belief.mean[X.thickening]);
  // Coolant: faced − heat/conductance, conductance = f/(1 + b·ice); its slope on ice is −heat·b/f₀.
  const onIce = (-heatW / freeze) * (thicker / (1 + thicker * Math.max(0, belief.mean[X.ice])));
  return [
    // A pump's plug tells flow from rest; without it a tenth of the melt goes uncounted or is counted twice.
    { point: 'loop-flow', gradient: [[X.flow, 1]], noise: 0.03 ** 2 },
    { point: 'entering-water', gradient: [[X.coil, 1]], noise: 0.1 ** 2 },
    {
      point: 'bank-level',
      gradient: [
        [X.ice, fullMm],
        [X.levelZero, 1],
      ],
      noise: 2 ** 2,
    },
    {
      point: 'coolant-supply',
      gradient: [
        [X.ice, onIce],
        [X.freeze, heatW / freeze],
        [X.supplyOffset, 1],
      ],
      noise: 0.4 ** 2,
    },
    {
      point: 'bank-middle',
      gradient: [
        [X.upper, 0.5],
        [X.lower, 0.5],
      ],
      noise: 0.3 ** 2,
    },
  ];
}

export function helpsMost(
  models: PlantModels,
  belief: Belief,
  heard: (point: PointName) => boolean,
): PointName | null {
  const slope = onHandSlopes(models, belief);
  const total = shared(belief, slope, slope);
  let best: PointName | null = null;
  let most = WORTH_NAMING;
  for (const trial of trials(models, belief)) {
    if (heard(trial.point) || !(trial.point in POINTS)) continue;
    if (trial.point === 'bank-level' && !models.bank.guess.iceHeld) continue;
    const common = shared(belief, slope, trial.gradient);
    const variance = shared(belief, trial.gradient, trial.gradient) + trial.noise;
    const narrowed = 1 - Math.sqrt(Math.max(0, 1 - (common * common) / (variance * total)));
    if (narrowed > most) {
      most = narrowed;
      best = trial.point;
    }
  }
  return best;
}
