import { createServer } from 'node:net';
import { expect, test } from 'vitest';
import { startEmbeddedBroker } from '../../src/mqtt/embedded-broker.ts';
import { freePort } from './mosquitto.ts';
import { observe, until } from './observer.ts';

test('takes any free port, carries and keeps messages, and ends with its connections', async () => {
  const broker = await startEmbeddedBroker({ host: '127.0.0.1', port: 0 });
  expect(broker.port).toBeGreaterThan(0);
  const first = await observe(broker.url, 'shed/#', 4);
  await first.publish('shed/a', 'kept', { retain: true });
  const second = await observe(broker.url, 'shed/#', 4);
  await until('the kept message', () => second.seen.length === 1);
  expect(second.latest('shed/a')).toMatchObject({ text: 'kept', retain: true });
  await broker.stop();
  await until('both are put out', () => !first.client.connected && !second.client.connected);
  await Promise.all([first.stop(), second.stop()]);
});

test('a port in use is one sentence', async () => {
  const port = await freePort();
  const other = createServer();
  await new Promise<void>((done) => other.listen(port, '127.0.0.1', done));
  await expect(startEmbeddedBroker({ host: '127.0.0.1', port })).rejects.toMatchObject({
    code: 'port-in-use',
    message: expect.stringMatching(
      /^The embedded broker cannot listen on 127\.0\.0\.1:\d+: the port is in use; /,
    ),
  });
  await new Promise((done) => other.close(done));
});

test('an address that is not ours is one sentence', async () => {
  // 192.0.2.0/24 is reserved for documentation (RFC 5737): no machine has it
  await expect(startEmbeddedBroker({ host: '192.0.2.1', port: 0 })).rejects.toMatchObject({
    code: 'broker-unreachable',
    message: expect.stringMatching(/check broker\.listen-host/),
  });
});
