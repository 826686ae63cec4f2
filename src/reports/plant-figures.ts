/** All of a sheet that drift is read from. */
import type { SiteConfig } from '../config.ts';
import type { CycleRecord } from '../record.ts';
import { figuresOf } from './figures.ts';
import type { NightSheet } from './night-schema.ts';
import { probeChecksOf } from './probe-checks.ts';
import { refillOf } from './refill.ts';
import { lastLongCharge, restsOf } from './runs.ts';
import type { Span } from './spans.ts';

type PlantFigures = Pick<NightSheet, 'figures' | 'figureErrors' | 'conditions' | 'refill' | 'probeChecks'>;

export function plantFigures(
  site: SiteConfig,
  spans: readonly Span[],
  recordsBefore: readonly CycleRecord[],
): PlantFigures {
  const charge = lastLongCharge(site, spans);
  const rests = restsOf(site, spans, recordsBefore);
  return {
    ...figuresOf({ site, spans, charge, rests }),
    refill: refillOf(site, spans, charge),
    probeChecks: probeChecksOf(site, charge, rests),
  };
}
