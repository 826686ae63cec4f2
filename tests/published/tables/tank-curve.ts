import {
  curveHeatW,
  lmtdStar,
  MEASURED_TANK,
  normalisedRate,
  simulatedTank,
  tankUaWPerK,
  uaPolynomial,
} from '../../../src/physics/tank-curve.ts';
import { fromSource, type Row } from '../published-value.ts';

const SIMULATED = simulatedTank(1e9);
const LAST_DIGIT = 'half a unit of the last digit';
const QL: readonly (readonly [number, number])[] = [
  [0, 0.612],
  [0.25, 0.53063],
  [0.5, 0.4035],
  [0.75, 0.23063],
  [1, 0.012],
];
const INTERNAL: readonly (readonly [number, number])[] = [
  [0, 1.3879],
  [0.25, 0.5316],
  [0.5, 0.3747],
  [0.75, 0.245],
  [1, 0.0435],
];
const EXTERNAL: readonly (readonly [number, number])[] = [
  [0, 1.1756],
  [0.25, 0.5398],
  [0.5, 0.4042],
  [0.75, 0.3051],
  [1, 0.1877],
];

export const tankCurves = [
  ...fromSource(
    {
      source: 'quadratic-linear curve of EnergyPlus 5ZoneDetailedIceStorage.idf, LMTD* = 1',
      standing: 'COMPUTED',
      why: LAST_DIGIT,
      tolerance: 5.1e-6,
    },
    QL.map(([x, q]): Row => [`q* at x = ${x}`, () => normalisedRate(SIMULATED.charging, x, 1), q]),
  ),
  ...fromSource(
    {
      source: 'same curve, LMTD* = 0.5 at x = 1 is -0.024 and is clamped',
      standing: 'COMPUTED',
      why: 'exact',
      tolerance: 0,
    },
    [['clamped q*', () => normalisedRate(SIMULATED.charging, 1, 0.5), 0]],
  ),
  ...fromSource(
    {
      source: 'Modelica Buildings Library, reference results of its LMTD* and curve tests',
      standing: 'READ',
      why: LAST_DIGIT,
    },
    [
      [
        'rate at x = 1, LMTD* = 1, 1/s',
        () => curveHeatW(SIMULATED, 'charging', 1, 1) / SIMULATED.capacityJ,
        3.3333e-6,
        5e-11,
      ],
      ['LMTD* of 6 °C to -2 °C', () => lmtdStar(6, -2, 0), 0.728191, 5e-7],
    ],
  ),
  ...fromSource(
    {
      source: 'Modelica Buildings Library Data/Tank/Experiment.mo, discharge curve at LMTD* = 0.5',
      standing: 'COMPUTED',
      why: LAST_DIGIT,
      tolerance: 5e-3,
    },
    [
      [
        'discharge at state of charge 1, kW',
        () => curveHeatW(MEASURED_TANK, 'discharging', 1, 0.5) / 1e3,
        58.72,
      ],
      [
        'discharge at state of charge 0.5, kW',
        () => curveHeatW(MEASURED_TANK, 'discharging', 0.5, 0.5) / 1e3,
        31.43,
      ],
      [
        'discharge at state of charge 0, kW',
        () => curveHeatW(MEASURED_TANK, 'discharging', 0, 0.5) / 1e3,
        15.69,
      ],
    ],
  ),
  ...fromSource(
    {
      source: 'Li et al. 2021: full tank of about 264 kWh',
      standing: 'READ',
      why: 'printed as 263.7 kWh',
      tolerance: 0.05,
    },
    [['capacity, kWh', () => MEASURED_TANK.capacityJ / 3.6e6, 263.7]],
  ),
  ...fromSource(
    {
      source: 'Henze & Krarti 2002 by the EnergyPlus Engineering Reference, charging and internal melt',
      standing: 'COMPUTED',
      why: LAST_DIGIT,
      tolerance: 5e-5,
    },
    INTERNAL.map(([y, ua]): Row => [`internal polynomial at ${y}`, () => uaPolynomial('internal', y), ua]),
  ),
  ...fromSource(
    {
      source: 'Henze & Krarti 2002 by the EnergyPlus Engineering Reference, external melt',
      standing: 'COMPUTED',
      why: LAST_DIGIT,
      tolerance: 5e-5,
    },
    EXTERNAL.map(([y, ua]): Row => [`external polynomial at ${y}`, () => uaPolynomial('external', y), ua]),
  ),
  ...fromSource(
    {
      source: 'Henze & Krarti 2002: UA = polynomial × capacity / 3600 s / 10 K',
      standing: 'COMPUTED',
      why: LAST_DIGIT,
      tolerance: 0.05,
    },
    [['UA of 1 GJ at y = 0, internal, W/K', () => tankUaWPerK('internal', 0, 1e9), 38_552.8]],
  ),
];
