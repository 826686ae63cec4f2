/** All that an estimator keeps between steps. */
import type { SiteConfig } from '../config.ts';
import type { PointName, Reading } from '../points.ts';
import { bankModel } from '../plant/bank.ts';
import { deliveryModel } from '../plant/delivery.ts';
import { iceMachine } from '../plant/ice-machine.ts';
import { newHealth, newSwapWatch, type ProbeHealth, type SwapWatch } from './consistency.ts';
import { newWorkspace, type Belief, type Workspace } from './filter.ts';
import { Folder } from './fold.ts';
import { PROBE_POINTS, priorsFor, STATES, type Priors, type ProbePoint } from './layout.ts';
import type { Moments } from './mixture.ts';
import { newPlateauWatch, type PlateauWatch } from './plateau-end.ts';
import { sensesOf, type Senses } from './observe.ts';
import { newFlows, type Flows, type PlantModels } from './models.ts';
import type { Nominal } from './report.ts';
import { openBeliefs } from './start.ts';

export interface Core {
  readonly config: SiteConfig;
  readonly models: PlantModels;
  readonly priors: Priors;
  readonly senses: Senses;
  readonly work: Workspace;
  readonly noise: Float64Array;
  readonly keep: Float64Array;
  readonly folder: Folder;
  readonly health: Map<ProbePoint, ProbeHealth>;
  readonly consistency: Map<PointName, { nis: number; steps: number }>;
  readonly nominal: Omit<Nominal, 'usefulCapacity'>;
  readonly stepMs: number;
  swap: SwapWatch;
  beliefs: Belief[];
  lastMs: number;
  waiting: Reading[];
  flows: Flows;
  predictedLeavingC: number | null;
  /** Ice of a full bank, kg, as full anchors have shown it. */
  capacity: Moments;
  /** Seconds that machine, flow and rest have lasted; 0 when they do not. */
  chargingS: number;
  flowingS: number;
  restingS: number;
  /** Probability of flow where only the leaving water tells. */
  flowChance: number;
  plateau: PlateauWatch;
  plateauEnded: boolean;
  leavingBeforeC: number | null;
  /** Entering and leaving contradict each other: probably swapped, not yet sure. */
  contrary: boolean;
  /** Measured over nominal flow, once a meter was heard. */
  meterRatio: number | null;
  electrode: boolean | null;
  fullSaid: boolean;
  started: boolean;
  sinceTidyS: number;
}

export function plantModels(config: SiteConfig): PlantModels {
  return {
    bank: bankModel(config),
    machine: iceMachine(config),
    delivery: deliveryModel(config),
    ratedOutdoorC: config.chiller.ratedOutdoorC,
    nominalIceMakingW: config.chiller.iceMakingW,
    internal: config.bank.form === 'ice-on-coil-internal',
    sealed: config.bank.form === 'sealed-containers',
  };
}

const DEFAULT_MAX_AGE_MS = 600_000;

export function newCore(config: SiteConfig, startMs: number, stepMs: number): Core {
  const models = plantModels(config);
  const priors = priorsFor(models.bank);
  const points: Readonly<Record<string, { readonly maxAgeMs: number } | undefined>> = config.points;
  return {
    config,
    models,
    priors,
    senses: sensesOf(models),
    work: newWorkspace(),
    noise: new Float64Array(STATES),
    keep: new Float64Array(STATES),
    folder: new Folder((point) => points[point]?.maxAgeMs ?? DEFAULT_MAX_AGE_MS),
    health: new Map(PROBE_POINTS.map((point) => [point, newHealth()])),
    consistency: new Map(),
    nominal: {
      heatLeakWPerK: models.bank.leakWPerK,
      meltWPerK: config.bank.meltWPerK,
      freezeWPerK: config.bank.freezeWPerK,
      flowLPerMin: config.delivery.flowLPerMin,
      coilWPerK: config.delivery.coilWPerK,
      chillerW: config.chiller.powerW,
    },
    stepMs,
    swap: newSwapWatch(),
    beliefs: openBeliefs(priors, null),
    lastMs: startMs,
    waiting: [],
    flows: newFlows(),
    predictedLeavingC: null,
    capacity: { mean: config.bank.mostIceKg, sd: 0.06 * config.bank.mostIceKg },
    chargingS: 0,
    flowingS: 0,
    restingS: 0,
    flowChance: 0.1,
    plateau: newPlateauWatch(),
    plateauEnded: false,
    leavingBeforeC: null,
    contrary: false,
    meterRatio: null,
    electrode: null,
    fullSaid: false,
    started: false,
    sinceTidyS: 0,
  };
}
