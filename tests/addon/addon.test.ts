import { validate, ValidationSeverity } from 'dockerfile-utils';
import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { parse } from 'yaml';
import { optionsSchema, referenceYaml } from '../../src/reference.ts';

const ROOT = join(import.meta.dirname, '../..');
const read = (path: string): string => readFileSync(join(ROOT, path), 'utf8');

describe('Dockerfile', () => {
  const text = read('Dockerfile');

  it('has no fault that a Dockerfile linter knows', () => {
    const serious = validate(text).filter(
      (found) => found.severity === ValidationSeverity.Error || found.severity === ValidationSeverity.Warning,
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

  it('addon/options.schema.json is what the schema says (npm run reference)', () => {
    expect(JSON.parse(read('addon/options.schema.json'))).toEqual(optionsSchema());
  });
});
