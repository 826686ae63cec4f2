/**
 * Vapour-compression refrigeration: the cycle from its state points, compressor maps as polynomials, and the
 * Carnot limit. Temperatures of a map are saturated (dew point) suction and discharge temperatures, °C.
 */
const KELVIN = 273.15;

/** Specific enthalpies around the cycle, J/kg. */
export interface CycleStates {
  /** At the compressor inlet. */
  readonly suctionJPerKg: number;
  /** After isentropic compression. */
  readonly isentropicDischargeJPerKg: number;
  /** Of the liquid at the expansion valve; throttling keeps it. */
  readonly liquidJPerKg: number;
}

export interface CyclePerformance {
  readonly coolingW: number;
  readonly compressorW: number;
  /** Heat given off at the condenser: cooling and compressor power together. */
  readonly rejectedW: number;
  readonly cop: number;
}

/**
 * Performance of a simple cycle: Moran & Shapiro, "Fundamentals of Engineering Thermodynamics", eq. 10.3 to
 * 10.7. `isentropicEfficiency` is (h2s - h1)/(h2 - h1).
 */
export function cycle(
  states: CycleStates,
  massFlowKgPerS: number,
  isentropicEfficiency = 1,
): CyclePerformance {
  const liftJPerKg = (states.isentropicDischargeJPerKg - states.suctionJPerKg) / isentropicEfficiency;
  const effectJPerKg = states.suctionJPerKg - states.liquidJPerKg;
  const coolingW = massFlowKgPerS * effectJPerKg;
  const compressorW = massFlowKgPerS * liftJPerKg;
  return { coolingW, compressorW, rejectedW: coolingW + compressorW, cop: effectJPerKg / liftJPerKg };
}

/**
 * The most that any refrigerator can reach between two temperatures; null when the lift is not above zero.
 */
export function carnotCop(evaporatingC: number, condensingC: number): number | null {
  const lift = condensingC - evaporatingC;
  return lift > 0 ? (evaporatingC + KELVIN) / lift : null;
}

/** C1 … C10 in the order of AHRI Standard 540. */
export type MapCoefficients = readonly [
  number,
  number,
  number,
  number,
  number,
  number,
  number,
  number,
  number,
  number,
];

/**
 * Ten-coefficient compressor polynomial, AHRI Standard 540 (eq. 1): S suction and D discharge dew point, in
 * the temperature unit and with the result unit that the coefficients were fitted for.
 */
export function evaluateMap(coefficients: MapCoefficients, suction: number, discharge: number): number {
  const [c1, c2, c3, c4, c5, c6, c7, c8, c9, c10] = coefficients;
  const s = suction;
  const d = discharge;
  const linear = c1 + c2 * s + c3 * d;
  const quadratic = c4 * s * s + c5 * s * d + c6 * d * d;
  const cubic = c7 * s ** 3 + c8 * d * s * s + c9 * s * d * d + c10 * d ** 3;
  return linear + quadratic + cubic;
}

/**
 * Reorders a bicubic 1, x, x², y, y², xy, x³, y³, x²y, xy² (x suction, y discharge) into the order of AHRI
 * 540.
 */
export function fromBicubic(bicubic: MapCoefficients): MapCoefficients {
  const [one, x, xx, y, yy, xy, xxx, yyy, xxy, xyy] = bicubic;
  return [one, x, y, xx, xy, yy, xxx, xxy, xyy, yyy];
}

/** A compressor known by its maps, and the range of both temperatures that they were fitted on. */
export interface CompressorMap {
  readonly coolingW: MapCoefficients;
  readonly powerW: MapCoefficients;
  readonly suctionRangeC: readonly [low: number, high: number];
  readonly dischargeRangeC: readonly [low: number, high: number];
}

/**
 * Low-temperature R-22 compressor of 5,440 W nominal: EnergyPlus data set RefrigerationCompressorCurves.idf,
 * first entry, fitted for saturated suction of -40 to -17.8 °C and saturated discharge of 10 to 48.9 °C.
 */
export const LOW_TEMPERATURE_R22: CompressorMap = {
  coolingW: fromBicubic([
    23500, 816.7, 10.7, -28.24, 0.1131, -0.4553, 0.05604, -0.00412, -0.006728, 0.006782,
  ]),
  powerW: fromBicubic([4018, 95.0, 1.507, 5.705, 1.247, -1.381, 0.01277, -0.007518, -0.02424, 0.02917]),
  suctionRangeC: [-40, -17.8],
  dischargeRangeC: [10, 48.9],
};

/**
 * Cooling, power and COP of a mapped compressor; null outside the range of its map, where a cubic goes
 * astray.
 */
export function operateCompressor(
  map: CompressorMap,
  suctionC: number,
  dischargeC: number,
): { readonly coolingW: number; readonly powerW: number; readonly cop: number } | null {
  if (!within(suctionC, map.suctionRangeC) || !within(dischargeC, map.dischargeRangeC)) return null;
  const coolingW = evaluateMap(map.coolingW, suctionC, dischargeC);
  const powerW = evaluateMap(map.powerW, suctionC, dischargeC);
  return { coolingW, powerW, cop: coolingW / powerW };
}

function within(value: number, [low, high]: readonly [number, number]): boolean {
  return value >= low && value <= high;
}
