import { existsSync, readFileSync } from 'node:fs';
import { MEASURED_TANK, solveTank } from '../../src/physics/tank-curve.ts';

/**
 * Li, Fu, Pertzborn, Wen & O'Neill 2021, "An Ice Storage Tank Modelica Model: Implementation and Validation",
 * doi 10.3384/ecp21181177; open data of the Modelica Buildings Library (Fluid/Storage/Ice/Validation/Experiment).
 */
export interface Experiment {
  readonly file: string;
  readonly rowsInFile: number;
  /** The published validation uses this span of the file. */
  readonly fromS: number;
  readonly toS: number;
  readonly startOfCharge: number;
  readonly endOfCharge: number;
  readonly binS: number;
  /** Drawn from the file: bin start s, rows, and means of entering °C, leaving °C, kg/s, kg/s·K, state of charge. */
  readonly bins: readonly Bin[];
}

export type Bin = readonly [
  startS: number,
  rows: number,
  enteringC: number,
  leavingC: number,
  flowKgPerS: number,
  flowTimesDropKgKPerS: number,
  stateOfCharge: number,
];

/** 30 % propylene glycol, J/(kg K), as the published evaluation takes it. */
export const COOLANT_CP_J_PER_KG_K = 3850;
export const STEP_S = 10;

/** One row of a file: time s, entering °C, leaving °C, coolant flow kg/s, state of charge by the bench's meter. */
export type Sample = readonly [number, number, number, number, number];

const FOLDER = new URL('../../../shared/data/ice-tank/', import.meta.url);

/** Rows of a file of the open data; null where the data are not at hand. */
export function readExperiment(file: string): readonly Sample[] | null {
  const path = new URL(file, FOLDER);
  if (!existsSync(path)) return null;
  const lines = readFileSync(path, 'utf8').trim().split('\n').slice(2);
  return lines.map((line): Sample => {
    const [timeS, enteringC, leavingC, flow, stateOfCharge] = line.trim().split(/\s+/).map(Number);
    return [timeS, enteringC, leavingC, flow, stateOfCharge];
  });
}

export const inSpan = (rows: readonly Sample[], experiment: Experiment): Sample[] =>
  rows.filter(([t]) => t >= experiment.fromS && t <= experiment.toS);

const flowTimesDrop = ([, entering, leaving, flow]: Sample): number => flow * (entering - leaving);

/** Means of the rows of each bin, to the digits that stand in the table. */
export function binned(rows: readonly Sample[], binS: number): Bin[] {
  const count = Math.ceil((rows[rows.length - 1][0] + 1 - rows[0][0]) / binS);
  const startOf = (i: number): number => rows[0][0] + i * binS;
  const bins = Array.from({ length: count }, (_, i) =>
    rows.filter(([t]) => t >= startOf(i) && t < startOf(i + 1)),
  );
  return bins.map((bin): Bin => {
    const mean = (pick: (row: Sample) => number, digits: number): number =>
      Number((bin.reduce((sum, row) => sum + pick(row), 0) / bin.length).toFixed(digits));
    return [
      bin[0][0],
      bin.length,
      mean((r) => r[1], 3),
      mean((r) => r[2], 3),
      mean((r) => r[3], 4),
      mean(flowTimesDrop, 4),
      mean((r) => r[4], 4),
    ];
  });
}

/** Water-side heat over the latent heat that the meter saw. */
export function heatRatio(flowTimesDropTimesS: number, experiment: Experiment): number {
  const latentJ = MEASURED_TANK.capacityJ * (experiment.startOfCharge - experiment.endOfCharge);
  return (flowTimesDropTimesS * COOLANT_CP_J_PER_KG_K) / latentJ;
}

export interface Step {
  readonly stateOfCharge: number;
  readonly leavingC: number;
}

/** The published curve driven along entering temperature and flow: state and leaving temperature at the start of each step. */
export function integrate(
  startOfCharge: number,
  inputs: Iterable<readonly [enteringC: number, flowKgPerS: number]>,
): Step[] {
  let stateOfCharge = startOfCharge;
  return Array.from(inputs, ([enteringC, flow]) => {
    const before = stateOfCharge;
    const { direction, heatW, leavingC } = solveTank(
      MEASURED_TANK,
      before,
      enteringC,
      flow * COOLANT_CP_J_PER_KG_K,
    );
    const sign = direction === 'charging' ? 1 : -1;
    stateOfCharge += (sign * heatW * STEP_S) / MEASURED_TANK.capacityJ;
    return { stateOfCharge: before, leavingC };
  });
}

export function rmse(errors: readonly number[]): number {
  return Math.sqrt(errors.reduce((sum, e) => sum + e * e, 0) / errors.length);
}

/** 5.6 h of melting with 12.5 °C entering. */
export const DISCHARGING: Experiment = {
  file: 'discharging1.txt',
  rowsInFile: 2000,
  fromS: 0,
  toS: 19_990,
  startOfCharge: 0.909960304,
  endOfCharge: 0.179683899,
  binS: 1800,
  bins: [
    [0, 180, 12.561, 0.423, 0.8896, 10.7977, 0.8765],
    [1800, 180, 12.577, 0.748, 0.8953, 10.5902, 0.8032],
    [3600, 180, 12.141, 1.044, 0.8969, 9.9522, 0.731],
    [5400, 180, 12.55, 1.323, 0.9017, 10.1234, 0.6604],
    [7200, 180, 12.656, 1.875, 0.9026, 9.7304, 0.5858],
    [9000, 180, 12.661, 2.517, 0.867, 8.7985, 0.5187],
    [10800, 180, 12.58, 3.109, 0.818, 7.7495, 0.4562],
    [12600, 180, 12.402, 3.555, 0.8192, 7.2469, 0.3947],
    [14400, 180, 12.339, 3.906, 0.8192, 6.908, 0.3374],
    [16200, 180, 12.324, 4.207, 0.8217, 6.6701, 0.2814],
    [18000, 180, 12.377, 4.458, 0.8314, 6.583, 0.2169],
    [19800, 20, 12.433, 4.556, 0.8266, 6.5116, 0.1817],
  ],
};

/** 12.6 h of freezing; before 15,000 s the tank only cools down. One row, at 22,540 s, has no flow. */
export const CHARGING: Experiment = {
  file: 'charging.txt',
  rowsInFile: 6038,
  fromS: 15_000,
  toS: 60_370,
  startOfCharge: 0.158,
  endOfCharge: 0.971,
  binS: 3600,
  bins: [
    [15000, 360, -4.047, -0.558, 1.5507, -5.4094, 0.2136],
    [18600, 360, -4.094, -0.612, 1.5506, -5.3996, 0.277],
    [22200, 360, -3.877, -0.603, 1.5375, -5.1372, 0.3463],
    [25800, 360, -4.155, -0.72, 1.5443, -5.3041, 0.4056],
    [29400, 360, -4.185, -0.75, 1.5447, -5.3074, 0.4556],
    [33000, 360, -4.223, -0.789, 1.5477, -5.315, 0.5066],
    [36600, 360, -4.267, -0.838, 1.5478, -5.3068, 0.5657],
    [40200, 360, -4.323, -0.904, 1.5499, -5.299, 0.6299],
    [43800, 360, -4.396, -0.98, 1.5493, -5.2925, 0.6889],
    [47400, 360, -4.51, -1.113, 1.549, -5.2627, 0.7571],
    [51000, 360, -4.683, -1.306, 1.5505, -5.2366, 0.8306],
    [54600, 360, -4.939, -1.602, 1.5513, -5.177, 0.9106],
    [58200, 218, -5.281, -1.997, 1.5488, -5.0859, 0.9657],
  ],
};
