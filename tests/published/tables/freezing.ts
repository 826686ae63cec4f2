import {
  frontDepthM,
  onePhaseLambda,
  stefanThicknessM,
  timeOnTubeS,
  twoPhaseLambda,
} from '../../../src/physics/freezing.ts';
import { fromSource, type Row } from '../published-value.ts';

const DAY_S = 86_400;
const ICE = { conductivityWPerMK: 2.22, heatCapacityJPerKgK: 2050, densityKgPerM3: 917 };
const WATER = { conductivityWPerMK: 0.57, heatCapacityJPerKgK: 4205, densityKgPerM3: 1000 };
const FUSION = 333.43e3;
const ALPHA = ICE.conductivityWPerMK / (ICE.heatCapacityJPerKgK * ICE.densityKgPerM3);
const lambda = (subcoolingK: number): number | null =>
  onePhaseLambda((ICE.heatCapacityJPerKgK * subcoolingK) / FUSION);
const neumannMm = (subcoolingK: number): number =>
  1e3 * frontDepthM(lambda(subcoolingK) ?? Number.NaN, ALPHA, DAY_S);

/** Subcooling K, λ, front after a day by Neumann mm, by Stefan mm. */
const ONE_PHASE: readonly (readonly [number, number, number, number])[] = [
  [1, 0.0554, 35.4, 35.4],
  [2, 0.0783, 50.0, 50.1],
  [3, 0.0957, 61.2, 61.4],
  [5, 0.1234, 78.8, 79.2],
  [10, 0.1736, 110.9, 112.0],
  [20, 0.2431, 155.3, 158.4],
];

/** Subcooling K, λ with water at 4 °C. */
const TWO_PHASE: readonly (readonly [number, number])[] = [
  [5, 0.1162],
  [10, 0.1655],
  [20, 0.2338],
];

// Lunardini 1981: diffusivity of the frozen ground 42.55 cm²/h, front 3.6 cm per root hour.
const FROZEN_M2_PER_S = 42.55e-4 / 3600;
const LUNARDINI_LAMBDA = 3.6 / (2 * Math.sqrt(42.55));
const lunardiniCm = (days: number): number =>
  100 * frontDepthM(LUNARDINI_LAMBDA, FROZEN_M2_PER_S, days * DAY_S);

export const freezingFront = [
  ...fromSource(
    {
      source: 'Neumann, one phase: √π λ exp(λ²) erf λ = Ste; k 2.22, c 2050, ρ 917, L 333.43e3',
      standing: 'COMPUTED',
      why: 'half a unit of the last digit',
      tolerance: 5.1e-5,
    },
    ONE_PHASE.map(([k, l]): Row => [`growth constant at ${k} K`, () => lambda(k), l]),
  ),
  ...fromSource(
    {
      source: 'Neumann, front after 24 h, same properties',
      standing: 'COMPUTED',
      why: 'half a unit of the last digit',
      tolerance: 0.051,
    },
    ONE_PHASE.map(([k, , mm]): Row => [`ice after a day at ${k} K, mm`, () => neumannMm(k), mm]),
  ),
  ...fromSource(
    {
      source: 'Stefan 1891, quasi-steady, same properties',
      standing: 'COMPUTED',
      why: 'half a unit of the last digit; density and heat of fusion differ by 3e-4 from the figure',
      tolerance: 0.08,
    },
    ONE_PHASE.map(([k, , , mm]): Row => [
      `quasi-steady ice after a day at ${k} K, mm`,
      () => 1e3 * stefanThicknessM(k, DAY_S),
      mm,
    ]),
  ),
  ...fromSource(
    {
      source: 'Stefan 1891: 3.54 cm per root of (K day)',
      standing: 'COMPUTED',
      why: 'half a unit of the last digit',
      tolerance: 5e-3,
    },
    [['coefficient, cm', () => 100 * stefanThicknessM(1, DAY_S), 3.54]],
  ),
  ...fromSource(
    {
      source: 'Neumann, two phases, water at 4 °C',
      standing: 'COMPUTED',
      why: 'the figure does not state the properties of its water; conductivities of 0.56–0.60 move it by 2e-4',
      tolerance: 2e-4,
    },
    TWO_PHASE.map(([k, l]): Row => [
      `growth constant at ${k} K with water at 4 °C`,
      () => twoPhaseLambda({ ice: ICE, water: WATER, fusionJPerKg: FUSION, subcoolingK: k, superheatK: 4 }),
      l,
    ]),
  ),
  ...fromSource(
    {
      source: 'Bonan, CLM text, neumann.m, after Lunardini 1981 and Jumikis 1966 (inputs READ)',
      standing: 'COMPUTED',
      why: 'half a unit of the last digit',
    },
    [
      ['growth constant', () => LUNARDINI_LAMBDA, 0.27595, 5e-6],
      ['frost after 1 day, cm', () => lunardiniCm(1), 17.64, 5e-3],
      ['frost after 10 days, cm', () => lunardiniCm(10), 55.77, 5e-3],
      ['frost after 30 days, cm', () => lunardiniCm(30), 96.6, 0.011],
      ['frost after 60 days, cm', () => lunardiniCm(60), 136.61, 5e-3],
    ],
  ),
  ...fromSource(
    {
      source: 'Carslaw & Jaeger 1959, Conduction of Heat in Solids, 11.2 (ice, 1 to 5 °C)',
      standing: 'from memory',
      why: 'cgs properties of the book are not at hand; with those used here the constants differ by up to 1.5 %',
      relative: 0.015,
    },
    (
      [
        [1, 0.056],
        [2, 0.079],
        [3, 0.097],
        [4, 0.111],
        [5, 0.124],
      ] as const
    ).map(([k, l]): Row => [`growth constant of the book at ${k} °C`, () => lambda(k), l]),
  ),
  ...fromSource(
    {
      source: 'quasi-steady ice on a tube of 8 mm to 25 mm radius at 5 K, k 2.22 (textbook form)',
      standing: 'COMPUTED',
      why: 'half a unit of the last digit',
      tolerance: 5e-4,
    },
    [['hours', () => timeOnTubeS(0.008, 0.025, 5) / 3600, 1.651]],
  ),
];
