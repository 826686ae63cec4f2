/** Where the truth model takes its weather from. */
export interface WeatherSample {
  readonly outdoorC: number;
  readonly outdoorRhPct: number;
  /** Global radiation on level ground. */
  readonly ghiWPerM2: number;
  readonly windMPerS: number;
}

export interface WeatherSource {
  /** The weather at an instant. Throws `usage` where the source has none (before or after a file's hours). */
  at(atMs: number): WeatherSample;
}

/** Weather that is the same at every instant; for tests of the plant alone. */
export function constantWeather(sample: WeatherSample): WeatherSource {
  return { at: () => sample };
}
