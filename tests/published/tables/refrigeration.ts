import {
  carnotCop,
  cycle,
  evaluateMap,
  LOW_TEMPERATURE_R22,
  operateCompressor,
  type CyclePerformance,
  type MapCoefficients,
} from '../../../src/physics/refrigeration.ts';
import { fromSource } from '../published-value.ts';

const TON_W = (12_000 * 1055.05585262) / 3600;
const LAST_DIGIT = 'half a unit of the last printed digit';

const fromKj = (h1: number, h2s: number, h3: number, kgPerS: number, efficiency = 1): CyclePerformance =>
  cycle(
    { suctionJPerKg: h1 * 1e3, isentropicDischargeJPerKg: h2s * 1e3, liquidJPerKg: h3 * 1e3 },
    kgPerS,
    efficiency,
  );

const example101 = (): CyclePerformance => fromKj(247.23, 264.7, 85.75, 0.08);
const example102 = (): CyclePerformance => fromKj(241.35, 272.39, 99.56, 0.08);
const example103 = (): CyclePerformance => fromKj(241.35, 272.39, 91.49, 0.08, 0.8);
const iceMaking = (): CyclePerformance => fromKj(238.41, 284.48, 117.77, 0.05);

const R410A_FLOW: MapCoefficients = [
  217.3163128, 5.094492028, -0.593170311, 4.38e-2, -2.14e-2, 1.04e-2, 7.9e-5, -5.73e-5, 1.79e-4, -8.08e-5,
];
const R410A_POWER: MapCoefficients = [
  -561.3615705, -15.62601841, 46.92506685, -0.217949552, 0.435062616, -0.442400826, 2.25e-4, 2.37e-3,
  -3.32e-3, 2.5e-3,
];
const LEE_POWER: MapCoefficients = [
  520.2, -11.83, -3.596, 0.02135, 0.2093, 0.02781, 7.176e-5, -7.415e-4, -6.77e-4, 1.233e-4,
];
const LEE_FLOW: MapCoefficients = [
  148.5, 3.518, -5.636, 0.1661, -0.1253, 0.08603, 6.465e-4, -2.105e-3, 1.114e-3, -3.855e-4,
];

const rackCompressor = (
  suctionC: number,
  dischargeC: number,
  key: 'coolingW' | 'powerW' | 'cop',
): number | null => operateCompressor(LOW_TEMPERATURE_R22, suctionC, dischargeC)?.[key] ?? null;

export const refrigeration = [
  ...fromSource(
    {
      source: 'Moran & Shapiro, Fundamentals of Engineering Thermodynamics, example 10.1 (R-134a, 0/26 °C)',
      standing: 'READ',
      why: LAST_DIGIT,
    },
    [
      ['compressor, kW', () => example101().compressorW / 1e3, 1.398, 5e-4],
      ['cooling, kW', () => example101().coolingW / 1e3, 12.92, 5e-3],
      ['cooling, tons of refrigeration', () => example101().coolingW / TON_W, 3.673, 1e-3],
      ['COP', () => example101().cop, 9.243, 5e-4],
      ['Carnot COP', () => carnotCop(0, 26), 10.5, 0.05],
    ],
  ),
  ...fromSource(
    { source: 'Moran & Shapiro, example 10.2 (R-134a, -10 °C, 9 bar)', standing: 'READ', why: LAST_DIGIT },
    [
      ['compressor, kW', () => example102().compressorW / 1e3, 2.483, 5e-4],
      ['cooling, tons of refrigeration', () => example102().coolingW / TON_W, 3.226, 1e-3],
      ['COP', () => example102().cop, 4.568, 5e-4],
    ],
  ),
  ...fromSource(
    {
      source: 'Moran & Shapiro, example 10.3 (isentropic efficiency 0.80, liquid at 30 °C)',
      standing: 'READ',
      why: LAST_DIGIT,
    },
    [
      ['compressor, kW', () => example103().compressorW / 1e3, 3.104, 5e-4],
      ['cooling, tons of refrigeration', () => example103().coolingW / TON_W, 3.409, 1e-3],
      ['COP', () => example103().cop, 3.862, 5e-4],
    ],
  ),
  ...fromSource(
    { source: 'course problem: R-134a, -20 °C, 1.2 MPa, 0.05 kg/s', standing: 'COMPUTED', why: LAST_DIGIT },
    [
      ['compressor, kW', () => iceMaking().compressorW / 1e3, 2.304, 5e-4],
      ['cooling, kW', () => iceMaking().coolingW / 1e3, 6.032, 5e-4],
      ['COP', () => iceMaking().cop, 2.619, 5e-4],
    ],
  ),
  ...fromSource(
    {
      source: 'GATE 1997, mechanical engineering: R-12, -10/40 °C',
      standing: 'COMPUTED',
      why: LAST_DIGIT,
      tolerance: 5e-4,
    },
    [['COP', () => fromKj(183.1, 220, 74.53, 1).cop, 2.942]],
  ),
  ...fromSource(
    {
      source:
        'AHRI 540 form; 3-ton R-410A coefficients of the ACHP simulator (°F, lbm/h, W; units from memory)',
      standing: 'COMPUTED',
      why: LAST_DIGIT,
    },
    [
      ['mass flow at (45, 130) °F, lbm/h', () => evaluateMap(R410A_FLOW, 45, 130), 459.45, 5e-3],
      ['power at (45, 130) °F, W', () => evaluateMap(R410A_POWER, 45, 130), 3075, 0.05],
      ['mass flow at (20, 100) °F, lbm/h', () => evaluateMap(R410A_FLOW, 20, 100), 291.95, 5e-3],
      ['power at (20, 100) °F, W', () => evaluateMap(R410A_POWER, 20, 100), 2110.2, 0.05],
    ],
  ),
  ...fromSource(
    {
      source: 'Lee et al. 2021, IOP Conf. Ser. Mater. Sci. Eng. 1180:012041, table 5',
      standing: 'COMPUTED',
      why: LAST_DIGIT,
    },
    [
      ['power at (12.3, 48.4) °C, W', () => evaluateMap(LEE_POWER, 12.3, 48.4), 382.8, 5e-3],
      ['mass flow at (12.3, 48.4) °C, g/s', () => evaluateMap(LEE_FLOW, 12.3, 48.4), 45.235, 5e-4],
    ],
  ),
  ...fromSource(
    {
      source: 'EnergyPlus data set RefrigerationCompressorCurves.idf, first entry (low-temperature R-22)',
      standing: 'COMPUTED',
      why: LAST_DIGIT,
    },
    [
      ['cooling at (-20, 35) °C, W', () => rackCompressor(-20, 35, 'coolingW'), 10_030, 0.5],
      ['power at (-20, 35) °C, W', () => rackCompressor(-20, 35, 'powerW'), 3936, 0.5],
      ['COP at (-20, 35) °C', () => rackCompressor(-20, 35, 'cop'), 2.548, 5e-4],
      ['cooling at (-30, 40) °C, W', () => rackCompressor(-30, 40, 'coolingW'), 5882, 0.5],
      ['power at (-30, 40) °C, W', () => rackCompressor(-30, 40, 'powerW'), 3306, 0.5],
      ['COP at (-30, 40) °C', () => rackCompressor(-30, 40, 'cop'), 1.779, 5e-4],
    ],
  ),
];
