import { validate, ValidationSeverity } from 'dockerfile-utils';
import { connectAsync } from 'mqtt';
import { execFileSync } from 'node:child_process';
import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { dirname, join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { parse } from 'yaml';
import { nightSheetJsonSchema } from '../../src/reports/night-schema.ts';
import { optionsSchema, referenceYaml } from '../../src/reference.ts';
import { hasMosquitto, startMosquitto } from '../mqtt/mosquitto.ts';

const ROOT = join(import.meta.dirname, '../..');
const read = (path: string): string => readFileSync(join(ROOT, path), 'utf8');

describe('Dockerfile', () => {
  const text = read('Dockerfile');

  it('has no fault that a Dockerfile linter knows', () => {
    const serious = validate(text).filter(
      (found) => found.severity === ValidationSeverity.ERROR || found.severity === ValidationSeverity.WARNING,
    );
    expect(serious).toEqual([]);
  });

  it('would be told of a fault', () => {
    expect(validate('FROM node:20\nRUNN npm ci\n').length).toBeGreaterThan(0);
  });

  it('builds in one stage and runs in another, not as root', () => {
    const stages = text.split(/^FROM /m).slice(1);
    expect(stages.length).toBe(2);
    expect(stages[1]).toMatch(/^USER (?!root)\w+/m);
    expect(stages[1]).not.toMatch(/apt-get/);
  });
});

describe('compose file', () => {
  interface Service {
    image?: string;
    build?: string;
    volumes?: string[];
    secrets?: string[];
    ports?: string[];
    read_only?: boolean;
    cap_drop?: string[];
    depends_on?: string[];
  }
  const compose = parse(read('addon/compose.yaml')) as {
    services: Record<string, Service>;
    volumes: Record<string, unknown>;
    secrets: Record<string, unknown>;
  };
  const services = Object.values(compose.services);

  it('names only volumes, secrets and services that it declares', () => {
    for (const service of services) {
      expect(Boolean(service.image) !== Boolean(service.build)).toBe(true);
      for (const volume of service.volumes ?? []) {
        const source = volume.split(':')[0];
        expect(source.startsWith('.') || source in compose.volumes, volume).toBe(true);
      }
      for (const secret of service.secrets ?? []) expect(compose.secrets).toHaveProperty([secret]);
      for (const other of service.depends_on ?? []) expect(compose.services).toHaveProperty([other]);
    }
  });

  it('opens ports on loopback only and gives rimehold no privileges', () => {
    for (const port of services.flatMap((service) => service.ports ?? []))
      expect(port).toMatch(/^127\.0\.0\.1:/);
    expect(compose.services['rimehold'].read_only).toBe(true);
    expect(compose.services['rimehold'].cap_drop).toEqual(['ALL']);
  });
});

describe('generated files', () => {
  it('config/reference.yaml is what the schema says (npm run reference)', () => {
    expect(read('config/reference.yaml')).toBe(referenceYaml());
  });

  it('addon/night-sheet.schema.json is what a sheet is (npm run reference)', () => {
    expect(JSON.parse(read('addon/night-sheet.schema.json'))).toEqual(nightSheetJsonSchema());
  });

  it('addon/options.schema.json is what the schema says (npm run reference)', () => {
    expect(JSON.parse(read('addon/options.schema.json'))).toEqual(optionsSchema());
  });
});

describe.skipIf(!hasMosquitto)('broker configuration and access list', () => {
  /** The shipped lines, with the folder of the test in place of the container's, its own port and no persistence. */
  const lines = read('addon/broker/mosquitto.conf')
    .split('\n')
    .filter((line) => !/^(listener|persistence|allow_anonymous)/.test(line))
    .map((line) => line.replaceAll('/mosquitto/config', 'FOLDER'));

  it('lets each user do its own work and no other', async () => {
    const broker = await startMosquitto({
      lines,
      anonymous: false,
      files: {
        'access.acl': read('addon/broker/access.acl'),
        passwords: passwordFile(['rimehold', 'sensors', 'hub']),
      },
    });
    try {
      const heard: string[] = [];
      const as = (user: string) =>
        connectAsync(broker.url, { username: user, password: user, protocolVersion: 5 });
      const [rimehold, sensors, hub] = await Promise.all([as('rimehold'), as('sensors'), as('hub')]);
      rimehold.on('message', (topic) => heard.push(`rimehold ${topic}`));
      hub.on('message', (topic) => heard.push(`hub ${topic}`));
      await rimehold.subscribeAsync(['juniper/#', 'homie/5/juniper/+/+/set']);
      await hub.subscribeAsync('homie/#');
      const publish = (client: typeof hub, topic: string) =>
        client.publishAsync(topic, '1', { qos: 1 }).catch(() => undefined);
      await publish(sensors, 'juniper/bank/leaving');
      await publish(sensors, 'homie/5/juniper/dispatch/command');
      await publish(hub, 'homie/5/juniper/dispatch/wish/set');
      await publish(hub, 'juniper/plugs/machine/set');
      await publish(rimehold, 'homie/5/juniper/dispatch/reason');
      await expect
        .poll(() => heard.toSorted())
        .toEqual([
          'hub homie/5/juniper/dispatch/reason',
          'hub homie/5/juniper/dispatch/wish/set',
          'rimehold homie/5/juniper/dispatch/wish/set',
          'rimehold juniper/bank/leaving',
        ]);
      await expect(connectAsync(broker.url, { username: 'rimehold', password: 'wrong' })).rejects.toThrow();
      await Promise.all([rimehold, sensors, hub].map((client) => client.endAsync()));
    } finally {
      await broker.stop();
    }
  });
});

/** Made by the broker's own tool; each user's password is its name. */
function passwordFile(users: readonly string[]): string {
  const file = join(mkdtempSync(join(tmpdir(), 'rimehold-passwords-')), 'passwords');
  writeFileSync(file, '');
  for (const user of users) execFileSync('mosquitto_passwd', ['-b', file, user, user]);
  const text = readFileSync(file, 'utf8');
  rmSync(dirname(file), { recursive: true });
  return text;
}
