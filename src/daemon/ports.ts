/** What the daemon is built from. Everything that touches the world comes in from outside, built by `main.ts`. */
import type { SiteConfig } from '../config.ts';
import type { EstimatorOptions } from '../estimation/types.ts';
import type { Actuators } from '../mqtt/actuators.ts';
import type { HomieDevice } from '../mqtt/homie-device.ts';
import type { Intake } from '../mqtt/intake.ts';
import type { Publisher } from '../mqtt/link.ts';
import type { NightSheet } from '../reports/night-schema.ts';
import type { CycleRecord } from '../record.ts';
import type { Store } from '../store/store.ts';
import type { Clock } from '../time.ts';

/** Context first, then a sentence: the order of the log library. */
export interface Log {
  info(context: object, sentence: string): void;
  warn(context: object, sentence: string): void;
  error(context: object, sentence: string): void;
}

export interface DaemonParts {
  readonly config: SiteConfig;
  readonly clock: Clock;
  /** Seconds of the daemon's time in a second of real time. */
  readonly clockRate: number;
  /** The clock is doubted before this instant. */
  readonly notBeforeMs: number;
  readonly seed: EstimatorOptions['seed'];
  readonly store: Store;
  readonly intake: Intake;
  readonly actuators: Actuators;
  readonly publisher: Publisher;
  readonly device: HomieDevice;
  readonly log: Log;
  /** Milliseconds from any fixed instant of real time. */
  readonly stopwatch: () => number;
}

/** What happens in the daemon, for the page, the demo and tests. */
export interface DaemonEvents {
  record?(record: CycleRecord): void;
  plan?(): void;
  night?(sheet: NightSheet): void;
}
