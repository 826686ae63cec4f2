/**
 * The part of PsychroLib that is used; the package carries no types. SI: °C, Pa, kg/kg, J/kg, m; RelHum as
 * 0–1.
 */
declare module 'psychrolib' {
  const psychrolib: {
    readonly SI: number;
    SetUnitSystem(unitSystem: number): void;
    GetSatVapPres(dryBulb: number): number;
    GetSatHumRatio(dryBulb: number, pressure: number): number;
    GetSatAirEnthalpy(dryBulb: number, pressure: number): number;
    GetHumRatioFromRelHum(dryBulb: number, relativeHumidity: number, pressure: number): number;
    GetHumRatioFromTWetBulb(dryBulb: number, wetBulb: number, pressure: number): number;
    GetRelHumFromHumRatio(dryBulb: number, humidityRatio: number, pressure: number): number;
    GetTDewPointFromHumRatio(dryBulb: number, humidityRatio: number, pressure: number): number;
    GetTWetBulbFromHumRatio(dryBulb: number, humidityRatio: number, pressure: number): number;
    GetMoistAirEnthalpy(dryBulb: number, humidityRatio: number): number;
    GetMoistAirVolume(dryBulb: number, humidityRatio: number, pressure: number): number;
    GetMoistAirDensity(dryBulb: number, humidityRatio: number, pressure: number): number;
    GetStandardAtmPressure(altitude: number): number;
  };
  export default psychrolib;
}
