import { iceAtNormalPressure, iceProperties } from '../../../src/physics/ice.ts';
import {
  FUSION_J_PER_KG,
  ICE_CONDUCTIVITY,
  ICE_DENSITY,
  WATER_CP_J_PER_KG_K,
  waterDensityKgPerM3,
  waterEnthalpyJPerKg,
  waterHeatCapacityJPerKgK,
} from '../../../src/physics/water.ts';
import { fromSource, type Row } from '../published-value.ts';

const R10 = 'IAPWS R10-06(2009), Equation of State 2006 for H2O Ice Ih, computer-program verification table';
const IAPWS95 = 'IAPWS-95 (Wagner & Pruß 2002), evaluated at 101.325 kPa';
const CRC = 'CRC Handbook of Chemistry and Physics, "Properties of ice and supercooled water"';
const LAST_DIGIT = 'half a unit of the last digit that the source prints';

const iceRows = (
  name: string,
  kelvin: number,
  pa: number,
  [h, s, cp, rho]: readonly [number, number, number, number],
): Row[] => [
  [`ice enthalpy ${name}, kJ/kg`, () => iceProperties(kelvin, pa).enthalpyJPerKg / 1e3, h, 5e-10],
  [`ice entropy ${name}, kJ/(kg K)`, () => iceProperties(kelvin, pa).entropyJPerKgK / 1e3, s, 5e-12],
  [
    `ice heat capacity ${name}, kJ/(kg K)`,
    () => iceProperties(kelvin, pa).heatCapacityJPerKgK / 1e3,
    cp,
    5e-12,
  ],
  [`ice density ${name}, kg/m³`, () => iceProperties(kelvin, pa).densityKgPerM3, rho, 5e-10],
];

const waterRows = (
  what: string,
  value: (c: number) => number,
  rows: readonly (readonly [c: number, expected: number])[],
): Row[] => rows.map(([c, expected]) => [`${what} at ${c} °C`, () => value(c), expected]);

const MELT_LEVEL_MM =
  (1 - ICE_DENSITY / waterDensityKgPerM3(0)) * (waterDensityKgPerM3(0) / ICE_DENSITY) * 1e3;

export const waterAndIce = [
  ...fromSource({ source: R10, standing: 'READ', why: LAST_DIGIT }, [
    ...iceRows(
      'at the normal melting point',
      273.152519,
      101_325,
      [-333.354873637, -1.2207693255, 2.09671391024, 916.721463419],
    ),
    ...iceRows(
      'at 100 K, 100 MPa',
      100,
      100e6,
      [-483.491635676, -2.61195122589, 0.866333195517, 941.678203297],
    ),
    [
      'ice enthalpy at the triple point, kJ/kg',
      () => iceProperties(273.16, 611.657).enthalpyJPerKg / 1e3,
      -333.444253966,
      5e-10,
    ],
    [
      'ice heat capacity at the triple point',
      () => iceProperties(273.16, 611.657).heatCapacityJPerKgK / 1e3,
      2.09678431622,
      5e-12,
    ],
    [
      'ice density at the triple point',
      () => iceProperties(273.16, 611.657).densityKgPerM3,
      916.7094922,
      5e-10,
    ],
  ]),
  ...fromSource(
    {
      source: `${IAPWS95} less ${R10}`,
      standing: 'COMPUTED',
      why: '0.1 MPa equations leave out the last 1.3 kPa (1.3 J/kg)',
      tolerance: 2,
    },
    [
      [
        'heat of fusion from the two equations, J/kg',
        () => waterEnthalpyJPerKg(0.002519) - iceProperties(273.152519, 101_325).enthalpyJPerKg,
        333_426.5,
      ],
      ['heat of fusion as used, J/kg', () => FUSION_J_PER_KG, 333_426.5, 0.05],
    ],
  ),
  ...fromSource(
    {
      source: `${CRC}: enthalpy of fusion at 0 °C`,
      standing: 'READ',
      why: 'two references that differ by 0.05 % themselves',
      relative: 7e-4,
    },
    [['heat of fusion against the handbook, J/g', () => FUSION_J_PER_KG / 1e3, 333.6]],
  ),
  ...fromSource(
    {
      source: `${CRC}: density of ice`,
      standing: 'READ',
      why: 'the handbook table is older than the equation and rounds to 1e-4; it runs 2e-4 higher as it gets colder',
      tolerance: 8e-4,
    },
    [
      ['ice density at 0 °C, g/cm³', () => iceAtNormalPressure(0).densityKgPerM3 / 1e3, 0.9167],
      ['ice density at -10 °C, g/cm³', () => iceAtNormalPressure(-10).densityKgPerM3 / 1e3, 0.9187],
      ['ice density at -20 °C, g/cm³', () => iceAtNormalPressure(-20).densityKgPerM3 / 1e3, 0.9203],
      ['ice density at -30 °C, g/cm³', () => iceAtNormalPressure(-30).densityKgPerM3 / 1e3, 0.9216],
    ],
  ),
  ...fromSource(
    {
      source: `${CRC}: heat capacity of ice`,
      standing: 'READ',
      why: 'the handbook rounds to 0.01 and stands up to 0.6 % from the equation',
      relative: 8e-3,
    },
    [
      ['ice heat capacity at 0 °C, J/(g K)', () => iceAtNormalPressure(0).heatCapacityJPerKgK / 1e3, 2.11],
      [
        'ice heat capacity at -10 °C, J/(g K)',
        () => iceAtNormalPressure(-10).heatCapacityJPerKgK / 1e3,
        2.03,
      ],
      [
        'ice heat capacity at -20 °C, J/(g K)',
        () => iceAtNormalPressure(-20).heatCapacityJPerKgK / 1e3,
        1.96,
      ],
    ],
  ),
  ...fromSource({ source: `${R10}, evaluated`, standing: 'COMPUTED', why: LAST_DIGIT }, [
    ['ice heat capacity at -10 °C', () => iceAtNormalPressure(-10).heatCapacityJPerKgK / 1e3, 2.0231, 5e-5],
    ['ice density at -10 °C', () => iceAtNormalPressure(-10).densityKgPerM3, 918.166, 5e-4],
    ['ice enthalpy at -10 °C, kJ/kg', () => iceAtNormalPressure(-10).enthalpyJPerKg / 1e3, -353.959, 5e-4],
  ]),
  ...fromSource(
    {
      source: `${CRC} 2.14; FAO tables 1.91 kcal/(m h K) = 2.22; textbook appendix 2.24`,
      standing: 'READ',
      why: 'printed conductivities at 0 °C differ by 5 %; the middle one is used',
      relative: 0.04,
    },
    [
      ['ice conductivity against the CRC Handbook, W/(m K)', () => ICE_CONDUCTIVITY, 2.14],
      ['ice conductivity against FAO', () => ICE_CONDUCTIVITY, 2.22],
      ['ice conductivity against a textbook appendix', () => ICE_CONDUCTIVITY, 2.24],
    ],
  ),
  ...fromSource(
    {
      source: IAPWS95,
      standing: 'COMPUTED',
      why: '1.3 J/kg of pressure left out by the 0.1 MPa equations, 0.5 J/kg of rounding, 1.2 J/kg between the simplified equations and IAPWS-95',
      tolerance: 3e-3,
    },
    waterRows('water enthalpy, kJ/kg,', (c) => waterEnthalpyJPerKg(c) / 1e3, [
      [0.002519, 0.072],
      [1, 4.279],
      [2, 8.493],
      [4, 16.914],
      [5, 21.12],
      [7, 29.526],
      [10, 42.119],
      [12, 50.506],
      [15, 63.077],
      [20, 84.007],
      [25, 104.92],
      [30, 125.823],
    ]),
  ),
  ...fromSource(
    {
      source: IAPWS95,
      standing: 'COMPUTED',
      why: 'equations agree within 0.01 % here, rounded to 1e-4',
      tolerance: 2e-4,
    },
    waterRows('water heat capacity, kJ/(kg K),', (c) => waterHeatCapacityJPerKgK(c) / 1e3, [
      [0, 4.2194],
      [5, 4.205],
      [10, 4.1952],
      [20, 4.1841],
      [30, 4.1798],
    ]),
  ),
  ...fromSource(
    {
      source: IAPWS95,
      standing: 'COMPUTED',
      why: '1.3 kPa of pressure is 7e-4 kg/m³, and the figure is rounded to 1e-3',
      tolerance: 1.3e-3,
    },
    waterRows('water density, kg/m³,', waterDensityKgPerM3, [
      [0, 999.843],
      [5, 999.967],
      [10, 999.702],
      [20, 998.207],
      [30, 995.649],
    ]),
  ),
  ...fromSource(
    {
      source: 'IAPWS SR6-08(2011), Properties of Liquid Water at 0.1 MPa, table 8 (260 K)',
      standing: 'READ',
      why: LAST_DIGIT,
    },
    [
      [
        'supercooled water heat capacity at 260 K, kJ/(kg K)',
        () => waterHeatCapacityJPerKgK(-13.15) / 1e3,
        4.30017472,
        5e-9,
      ],
      ['supercooled water density at 260 K, kg/m³', () => waterDensityKgPerM3(-13.15), 997.06836, 5e-7],
      [
        'supercooled water enthalpy at 260 K, kJ/kg (g + T s)',
        () => waterEnthalpyJPerKg(-13.15) / 1e3,
        -1.2659892 + 260 * -0.20998555,
        2e-6,
      ],
    ],
  ),
  ...fromSource({ source: 'IAPWS-95 and R10-06, arithmetic', standing: 'COMPUTED', why: LAST_DIGIT }, [
    ['density of water over ice', () => waterDensityKgPerM3(0) / ICE_DENSITY, 1.09067, 5e-6],
    ['rise of level by frozen ice held in place, mm per m of water', () => MELT_LEVEL_MM, 90.7, 0.05],
    ['ice for 1 kWh of cold, kg', () => 3.6e6 / FUSION_J_PER_KG, 10.797, 5e-4],
    ['ice for 1 kWh of cold, L', () => 3.6e9 / FUSION_J_PER_KG / ICE_DENSITY, 11.78, 5e-3],
    [
      'inventory missed by ignoring melt water at 10 °C, %',
      () => (100 * waterEnthalpyJPerKg(10)) / FUSION_J_PER_KG,
      12.6,
      0.05,
    ],
  ]),
  ...fromSource(
    {
      source: 'common practice, no source: one pound of melting ice takes up 144 BTU',
      standing: 'from memory',
      why: 'the trade rounds to a whole BTU; 143.35 is the exact figure',
      tolerance: 0.75,
    },
    [['heat of fusion, BTU/lb', () => (FUSION_J_PER_KG * 0.45359237) / 1055.05585262, 144]],
  ),
  ...fromSource(
    {
      source:
        'common practice, no source: a ton of refrigeration melts a short ton of ice in 24 h, 12,000 BTU/h',
      standing: 'from memory',
      why: 'the trade takes 144 BTU/lb where 143.35 is exact: 0.5 %',
      relative: 5e-3,
    },
    [
      [
        'melting a short ton a day, BTU/h',
        () => (FUSION_J_PER_KG * 2000 * 0.45359237) / 1055.05585262 / 24,
        12_000,
      ],
    ],
  ),
  ...fromSource(
    {
      source: 'common practice: 240 L between 0 and 10 °C hold 2.8 kWh',
      standing: 'COMPUTED',
      why: 'printed to 0.1 kWh',
      tolerance: 0.05,
    },
    [['sensible cold of 240 L, kWh', () => (240 * WATER_CP_J_PER_KG_K * 10) / 3.6e6, 2.8]],
  ),
];
