import { effectiveness, lmtdK, phaseChangeEffectiveness } from '../../../src/physics/heat-exchanger.ts';
import { fromSource } from '../published-value.ts';

const HT = 'reproduced by the open library ht (C. Bell), ht/hx.py';
const LAST_DIGIT = 'half a unit of the last printed digit';

// Holman, Heat Transfer 10e, example 10-9: 275 W/(m²K) over 10.82 m², oil 0.725 kg/s of 1900, steam 5.2 kg/s of 1860.
const OIL_W_PER_K = 0.725 * 1900;
const STEAM_W_PER_K = 5.2 * 1860;
const NTU_109 = (275 * 10.82) / OIL_W_PER_K;
const effectiveness109 = (): number =>
  effectiveness(NTU_109, OIL_W_PER_K / STEAM_W_PER_K, 'crossflow-cmax-mixed');
const heat109W = (): number => effectiveness109() * OIL_W_PER_K * (130 - 15);

// Holman example 10-8: oil 1.45 kg/s from 15 to 85 °C, NTU found by the source.
const OIL_108_W_PER_K = 1.45 * 1900;
const heat108W = (): number =>
  effectiveness(1.104084, OIL_108_W_PER_K / STEAM_W_PER_K, 'crossflow-cmax-mixed') *
  OIL_108_W_PER_K *
  (130 - 15);

const BERGMAN_111 = { hotInC: 100, hotOutC: 60, coldInC: 30, coldOutC: 40.2 };

export const heatExchangers = [
  ...fromSource(
    { source: `Holman, Heat Transfer, 10th ed., example 10-9, ${HT}`, standing: 'READ', why: LAST_DIGIT },
    [
      ['transfer units', () => NTU_109, 2.16007, 5e-6],
      ['effectiveness, crossflow, steam mixed', effectiveness109, 0.83122, 5e-6],
      ['heat, W', heat109W, 131_675, 0.5],
      ['oil leaving, °C', () => 15 + heat109W() / OIL_W_PER_K, 110.59, 5e-4],
      ['steam leaving, °C', () => 130 - heat109W() / STEAM_W_PER_K, 116.386, 5e-4],
    ],
  ),
  ...fromSource(
    { source: `Holman, Heat Transfer, 10th ed., example 10-8, ${HT}`, standing: 'READ', why: LAST_DIGIT },
    [
      ['effectiveness', () => heat108W() / (OIL_108_W_PER_K * 115), 0.608696, 5e-7],
      ['conductance, W/K', () => 1.104084 * OIL_108_W_PER_K, 3041.75, 5e-3],
      ['steam leaving, °C', () => 130 - heat108W() / STEAM_W_PER_K, 110.061, 5e-4],
    ],
  ),
  ...fromSource(
    {
      source: `NTU 5, capacity ratio 0.7, ${HT}; formulas of Bergman et al. 2011 table 11.3`,
      standing: 'READ',
      why: LAST_DIGIT,
      tolerance: 5e-7,
    },
    [
      ['effectiveness, parallel', () => effectiveness(5, 0.7, 'parallel'), 0.588116],
      ['effectiveness, counterflow', () => effectiveness(5, 0.7, 'counterflow'), 0.92067, 5e-6],
      ['effectiveness, shell and tube', () => effectiveness(5, 0.7, 'shell-and-tube'), 0.683498],
    ],
  ),
  ...fromSource(
    {
      source: `NTU 5, capacity ratio 0.7, ${HT}, exact series`,
      standing: 'READ',
      why: 'the closed form is a fit to the exact series, here 1.7e-6 off',
      tolerance: 5e-6,
    },
    [['effectiveness, crossflow unmixed', () => effectiveness(5, 0.7, 'crossflow-unmixed'), 0.844482]],
  ),
  ...fromSource(
    {
      source: `Bergman et al., Fundamentals of Heat and Mass Transfer, example 11.1, ${HT}`,
      standing: 'READ',
      why: LAST_DIGIT,
      tolerance: 5e-5,
    },
    [
      ['mean temperature difference, counterflow, K', () => lmtdK(BERGMAN_111), 43.2004],
      ['mean temperature difference, parallel, K', () => lmtdK(BERGMAN_111, 'parallel'), 39.7525],
    ],
  ),
  ...fromSource(
    {
      source: 'Bergman et al. 2011 eq. 11.35a, arithmetic',
      standing: 'COMPUTED',
      why: LAST_DIGIT,
      tolerance: 5e-7,
    },
    [['effectiveness against ice at NTU 1', () => phaseChangeEffectiveness(1), 0.632121]],
  ),
];
