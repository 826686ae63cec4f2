/** A device in a process of its own, to be killed: `node --import tsx doomed-device.ts URL`. */
import { BrokerClient } from '../../src/mqtt/client.ts';
import { willOf } from '../../src/mqtt/homie.ts';
import { HomieDevice } from '../../src/mqtt/homie-device.ts';
import { cycleRecord, NOW_MS, pretendCleared, siteConfig } from '../mqtt/site.ts';

const config = siteConfig();
const client = new BrokerClient(
  {
    url: process.argv[2],
    clientId: 'rimehold-juniper',
    protocol: 'auto',
    user: null,
    password: null,
    tls: null,
    will: willOf(config),
    timing: { willDelayS: 1 },
  },
  { message: () => undefined, state: () => undefined, note: () => undefined },
);
const device = new HomieDevice({
  config,
  publisher: client,
  settings: { strategy: 'planned', wish: 'none', wishForMs: 7_200_000, limitC: 26, told: null },
  nowMs: () => NOW_MS,
  onSet: () => null,
  onRefused: () => undefined,
});
await client.start();
device.publishOrder(pretendCleared());
device.publishCycle(cycleRecord(), { pointsHeard: 4, warmTonightKh: 0 });
await device.announce();
