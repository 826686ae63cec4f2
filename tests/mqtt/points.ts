/** Points for tests, as the site file would yield them. */
import type { PointConfig } from '../../src/config.ts';
import { pointSpec, type PointId } from '../../src/points.ts';
import type { KnownPoint } from '../../src/mqtt/payload.ts';

export function pointConfig(changes: Partial<PointConfig> = {}): PointConfig {
  return {
    topic: 'shed/probe',
    read: 'plain',
    unit: null,
    timePointer: null,
    maxAgeMs: 600_000,
    offsetK: 0,
    trueText: 'true',
    falseText: 'false',
    ...changes,
  };
}

export function knownPoint(id: PointId, changes: Partial<PointConfig> = {}): KnownPoint {
  const spec = pointSpec(id);
  if (!spec) throw new TypeError(`no point ${id}`);
  return { id, config: pointConfig(changes), spec };
}
