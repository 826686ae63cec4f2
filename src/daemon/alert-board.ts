/** Alerts as they stand: told to the log when they come, to the device when they come and go. */
import type { SiteConfig } from '../config.ts';
import type { Ticked } from '../cycle.ts';
import type { Moment } from '../cycle-values.ts';
import { alertsOf, type AlertSigns } from '../dispatch/alerts.ts';
import type { DaemonParts } from './ports.ts';

export class AlertBoard {
  readonly #standing = new Set<string>();

  show(
    parts: DaemonParts,
    config: SiteConfig,
    moment: Moment,
    ticked: Ticked,
    beside: Pick<AlertSigns, 'expectedWarmKh' | 'listeningMs'>,
  ): void {
    const { store, actuators, device, log } = parts;
    const faults = actuators.faults(moment.live, moment.nowMs);
    const alerts = alertsOf({
      config,
      live: moment.live,
      clock: moment.clock,
      storeFault: store.health().fault?.message ?? null,
      switchFaults: Object.fromEntries(faults.map(({ machine, sentence }) => [machine, sentence])),
      setAside: ticked.estimate.probes.flatMap(({ point, setAside }) =>
        setAside === null ? [] : [{ point, why: setAside }],
      ),
      spoken: ticked.spoken,
      ...beside,
    });
    for (const [id, sentence] of alerts) {
      if (!this.#standing.has(id)) log.warn({ alert: id }, sentence);
      this.#standing.add(id);
      device.alert(id, sentence);
    }
    for (const id of this.#standing) {
      if (alerts.has(id)) continue;
      this.#standing.delete(id);
      device.alert(id, null);
    }
  }
}
