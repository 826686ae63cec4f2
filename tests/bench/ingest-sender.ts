/** Publishes numbered readings at a pace, QoS 1, and says how long the broker took to take them. */
import { connect } from 'mqtt';
import { createRandom } from '../../src/numerics/random.ts';
import { BENCH_POINTS, type Ask, type Sent } from './ingest-words.ts';

/** Messages that the broker has not answered yet, at most. */
const WINDOW = 4000;

const [, , url, seed] = process.argv;
const random = createRandom(Number(seed));
const client = connect(url, { protocolVersion: 5, reconnectPeriod: 0 });
/** Each reading has a millisecond of its own, back from now, so that none hides another. */
let sequence = 0;

function payload(form: 'json' | 'senml', atMs: number): string {
  const value = Math.round(random.next() * 30_000) / 1000;
  return form === 'json'
    ? JSON.stringify({ sensor: { t: value, time: atMs } })
    : JSON.stringify([{ n: 'p', u: 'Cel', v: value, t: atMs / 1000 }]);
}

async function send(count: number, perSecond: number | null): Promise<Sent> {
  const startMs = performance.now();
  // times end before now: a reading from the future would be moved to its arrival
  const firstMs = Date.now() - 86_400_000 + sequence;
  let sent = 0;
  let taken = 0;
  await new Promise<void>((done) => {
    const one = (): void => {
      const point = BENCH_POINTS[Math.floor(random.next() * BENCH_POINTS.length)];
      client.publish(point.topic, payload(point.form, firstMs + sent), { qos: 1 }, () => {
        taken += 1;
        if (taken === count) done();
        else if (perSecond === null) fill();
      });
      sent += 1;
    };
    const due = (): number =>
      perSecond === null ? count : Math.min(count, ((performance.now() - startMs) / 1000) * perSecond);
    const fill = (): void => {
      const until = Math.min(due(), taken + WINDOW);
      for (let next = sent; next < until; next++) one();
    };
    fill();
    if (perSecond === null) return;
    const timer = setInterval(() => {
      fill();
      if (sent === count) clearInterval(timer);
    }, 2);
  });
  sequence += count;
  return { sent: count, tookMs: performance.now() - startMs };
}

process.on('message', (ask: Ask) => {
  if (ask.ask === 'send') void send(ask.count, ask.perSecond).then((sent) => process.send?.(sent));
});
process.on('disconnect', () => client.end(true, () => process.exit(0)));
client.on('connect', () => process.send?.('ready'));
