/** A broker that is not there, refuses, or whose place is taken; ports that are taken; what `check` says of it all. */
import { createServer } from 'node:net';
import { existsSync, readdirSync } from 'node:fs';
import { join } from 'node:path';
import { connectAsync } from 'mqtt';
import { describe, expect, it, onTestFinished } from 'vitest';
import {
  freePort,
  hasMosquitto,
  passwords,
  startMosquitto,
  type Mosquitto,
  type MosquittoOptions,
} from '../mqtt/mosquitto.ts';
import { openStore } from '../../src/store/store.ts';
import { expectNarrow, expectNoInsides, expectRefusal, ownFolder, rimehold, writeSite } from './stranger.ts';

async function broker(options: MosquittoOptions = {}): Promise<Mosquitto> {
  const started = await startMosquitto(options);
  onTestFinished(() => started.stop());
  return started;
}

/** Another program that has a loopback port. */
async function taken(): Promise<number> {
  const server = createServer();
  await new Promise<void>((done) => server.listen(0, '127.0.0.1', done));
  onTestFinished(() => new Promise<void>((done) => void server.close(() => done())));
  const address = server.address();
  return address !== null && typeof address === 'object' ? address.port : 0;
}

/** The database that a start has made is free again for the next one. */
function expectFree(folder: string): void {
  openStore(join(folder, 'juniper.db'), { siteId: 'juniper' }).close();
}

it('no broker: run could not (3), and frees its database', async () => {
  const folder = ownFolder();
  const port = await freePort();
  writeSite(folder, { url: `mqtt://127.0.0.1:${port}` });
  expectRefusal(await rimehold(folder, 'run'), 3, `127.0.0.1:${port}`, 'broker.url', 'nothing listens');
  expectFree(folder);
});

it('no broker: check answers no (1) in 80 columns, as text and as JSON, and makes no database', async () => {
  const folder = ownFolder();
  const port = await freePort();
  writeSite(folder, { url: `mqtt://127.0.0.1:${port}` });
  const text = await rimehold(folder, 'check', '--listen', 'PT1S');
  expect(text).toMatchObject({ status: 1, err: '' });
  expectNoInsides(text.out);
  expectNarrow(text.out);
  for (const fact of [`127.0.0.1:${port}`, 'broker.url', 'Juniper hut', 'juniper.db', 'Not yet'])
    expect(text.out).toContain(fact);
  const json = await rimehold(folder, 'check', '--listen', 'PT1S', '--json');
  expect(json).toMatchObject({ status: 1, err: '' });
  expect(JSON.parse(json.out)).toMatchObject({ mayRun: false, broker: expect.stringContaining(`${port}`) });
  expect(readdirSync(folder)).toEqual(['site.yaml']);
});

it('the port of the embedded broker is taken', async () => {
  const folder = ownFolder();
  const port = await taken();
  writeSite(folder, { broker: `embedded: true\n  listen-port: ${port}` });
  expectRefusal(await rimehold(folder, 'run'), 3, `127.0.0.1:${port}`, 'broker.listen-port', 'in use');
  expectFree(folder);
});

it('the port of the page is taken', async () => {
  const folder = ownFolder();
  const port = await taken();
  writeSite(folder, { broker: 'embedded: true\n  listen-port: 0', web: `port: ${port}` });
  expectRefusal(await rimehold(folder, 'run'), 3, `127.0.0.1:${port}`, 'web.port');
  expectFree(folder);
});

it('the address of the page is not of this machine', async () => {
  const folder = ownFolder();
  writeSite(folder, { broker: 'embedded: true\n  listen-port: 0', web: 'host: 192.0.2.1, port: 0' });
  expectRefusal(await rimehold(folder, 'run'), 2, '192.0.2.1', 'web.host', 'does not have that address');
  expectFree(folder);
});

describe.skipIf(!hasMosquitto)('mosquitto', () => {
  it.each(['run', 'check'])('refuses a wrong password: %s', async (verb) => {
    const { url, port } = await broker({
      anonymous: false,
      lines: ['password_file FOLDER/passwords'],
      files: passwords('juniper', 'cold'),
    });
    const folder = ownFolder();
    const key = 'password-env: RIMEHOLD_TEST_PASSWORD';
    writeSite(folder, { broker: `url: ${url}\n  user: juniper\n  ${key}` });
    process.env.RIMEHOLD_TEST_PASSWORD = 'warm-and-secret';
    onTestFinished(() => void delete process.env.RIMEHOLD_TEST_PASSWORD);
    const facts = [`127.0.0.1:${port}`, 'broker.user', 'broker.password-file', 'authorized'];
    const ended = await rimehold(folder, verb);
    if (verb === 'run') expectRefusal(ended, 3, ...facts);
    else {
      expect(ended.status).toBe(1);
      const said = ended.out.replaceAll(/\s+/g, ' ');
      for (const fact of facts) expect(said).toContain(fact);
      expectNarrow(ended.out);
    }
    expect(ended.out + ended.err).not.toContain('warm-and-secret');
    expect(existsSync(join(folder, 'juniper.db'))).toBe(verb === 'run');
  });

  it('brings only some points: check answers no (1), marks them and names what is missing', async () => {
    const { url } = await broker();
    const folder = ownFolder();
    writeSite(folder, { url });
    const plant = await publishing(url, {
      'juniper/bank/leaving': '4.25',
      'juniper/plugs/pump': '{"power":',
    });
    const { status, out, err } = await rimehold(folder, 'check', '--listen', 'PT2S');
    await plant.stop();
    expect(status).toBe(1);
    expect(err).toBe('Listening for PT2S …\n');
    expectNoInsides(out);
    expectNarrow(out);
    expect(out).toMatch(/^ {2}leaving-water +4\.25 °C +\d+ s/m);
    expect(out).toMatch(/^! chiller-power +nothing on juniper\/plugs\/machine$/m);
    expect(out).toMatch(/^\? pump-power +expected JSON/m);
    expect(out.replaceAll(/\s+/g, ' ')).toMatch(
      /Not yet: chiller-power, room-temperature, .*outdoor-temperature must be heard\. ?$/,
    );
  });

  it('brings every point that is needed: the plant may run (0)', async () => {
    const { url } = await broker();
    const folder = ownFolder();
    writeSite(folder, { url });
    const senml = '[{"n":"temperature","u":"Cel","v":25.5},{"n":"humidity","u":"%RH","v":41}]';
    const topics = ['juniper/living', 'juniper/loft', 'juniper/outdoor'];
    const plant = await publishing(url, {
      'juniper/bank/leaving': '4.25',
      'juniper/plugs/machine': '{"power":0}',
      ...Object.fromEntries(topics.map((topic) => [topic, senml])),
    });
    const { status, out } = await rimehold(folder, 'check', '--listen', 'PT3S');
    await plant.stop();
    expectNarrow(out);
    expect(out).toContain('The plant may run.');
    expect(status).toBe(0);
  });
});

/** A plant that says the same again and again until it is stopped. */
async function publishing(
  url: string,
  payloads: Readonly<Record<string, string>>,
): Promise<{ stop(): Promise<void> }> {
  const client = await connectAsync(url);
  const timer = setInterval(() => {
    for (const [topic, payload] of Object.entries(payloads)) client.publish(topic, payload, { qos: 1 });
  }, 100);
  const stop = async (): Promise<void> => {
    clearInterval(timer);
    await client.endAsync(true);
  };
  onTestFinished(stop);
  return { stop };
}
