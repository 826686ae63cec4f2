/**
 * The whole job without broker and database: simulated probes → payloads → intake → cycle → machines. Fast enough for
 * seasons, and every figure comes through the same pure functions that the daemon calls.
 */
import type { SiteConfig } from '../../src/config.ts';
import { forecastSite, replan, replanDue, stagesOf, startState, tick, type Ticked } from '../../src/cycle.ts';
import { planRecordOf } from '../../src/cycle-plan.ts';
import type { CycleState, Moment, Stages, Wanted } from '../../src/cycle-values.ts';
import { createEstimator } from '../../src/estimation/estimator.ts';
import { createForecaster } from '../../src/forecasting/forecaster.ts';
import { Intake } from '../../src/mqtt/intake.ts';
import { MACHINES } from '../../src/order.ts';
import type { Reading } from '../../src/points.ts';
import type { PlanRecord } from '../../src/record.ts';
import type { Simulator } from '../../src/simulator/simulator.ts';
import { Wire } from '../../src/simulator/wire.ts';

export interface DirectLoopOptions {
  readonly config: SiteConfig;
  readonly simulator: Simulator;
  readonly startMs: number;
  readonly seed?: number;
  readonly wanted?: Wanted;
  readonly onReadings?: (readings: readonly Reading[]) => void;
  /** Called with the time that each plan took, real milliseconds. */
  readonly onPlan?: (plan: PlanRecord, tookMs: number) => void;
}

export class DirectLoop {
  readonly stages: Stages;
  state: CycleState;
  last: Ticked | null = null;
  readonly #options: DirectLoopOptions;
  readonly #wire: Wire;
  readonly #intake: Intake;
  #nowMs: number;
  #pending: Reading[] = [];

  constructor(options: DirectLoopOptions) {
    const { config, startMs, seed = 1 } = options;
    this.#options = options;
    this.#wire = new Wire(config);
    this.#intake = new Intake(config.points);
    this.#nowMs = startMs;
    this.stages = stagesOf(
      config,
      createEstimator(config, { seed, startMs }),
      createForecaster(forecastSite(config), { seed }),
    );
    this.state = startState(startMs, null);
  }

  get nowMs(): number {
    return this.#nowMs;
  }

  /** One cycle: the plant lives on, its probes speak, an order is given and obeyed. */
  cycle(): Ticked {
    const { config, simulator, wanted = { wish: null, strategy: 'planned' } } = this.#options;
    this.#nowMs += config.planning.cycleMs;
    this.#hear();
    const moment = this.#moment();
    const readings = this.#pending.splice(0).toSorted((a, b) => a.atMs - b.atMs);
    if (this.state.planned === null) this.stages.estimator.advance(this.#nowMs, readings.splice(0), null);
    if (replanDue(this.state, config, this.#nowMs)) this.#replan(moment, wanted);
    const ticked = tick(this.stages, this.state, moment, wanted, readings);
    this.state = ticked.state;
    for (const machine of MACHINES) simulator.switch(machine, ticked.order.switches[machine]);
    this.last = ticked;
    return ticked;
  }

  #hear(): void {
    const { simulator } = this.#options;
    const on = this.state.order?.switches ?? { chiller: false, pump: false, fan: false };
    for (const { topic, payload } of this.#wire.messages(simulator.advance(this.#nowMs), on)) {
      const message = { topic, payload: Buffer.from(payload), retained: false };
      const { readings } = this.#intake.hear(message, this.#nowMs);
      this.#options.onReadings?.(readings);
      this.#pending.push(...readings);
    }
  }

  #moment(): Moment {
    return {
      nowMs: this.#nowMs,
      live: this.#intake.live(this.#nowMs),
      clock: { state: 'set', why: '' },
      brokerConnected: true,
    };
  }

  #replan(moment: Moment, wanted: Wanted): void {
    const begunMs = performance.now();
    const planned = replan(this.stages, this.state, moment, wanted, {
      outdoorForecast: null,
      datedPrices: [],
      demand: null,
      month: null,
      houseW: null,
    });
    this.state = { ...this.state, planned };
    this.#options.onPlan?.(planRecordOf(planned), performance.now() - begunMs);
  }
}
