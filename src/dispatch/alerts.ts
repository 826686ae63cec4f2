/** What a person should know now, as plain sentences by id: the Homie device's alerts and the page's notices. */
import type { SiteConfig } from '../config.ts';
import type { Machine } from '../order.ts';
import { POINTS, type LivePoints, type PointId, type PointName } from '../points.ts';
import type { ClockVerdict } from './clock.ts';
import type { Spoken } from './interlocks.ts';

export interface AlertSigns {
  readonly config: SiteConfig;
  readonly live: LivePoints;
  readonly clock: ClockVerdict;
  /** The store's own sentence while it cannot write; null when it can. */
  readonly storeFault: string | null;
  /** Sentences of switches that show no effect. */
  readonly switchFaults: Readonly<Partial<Record<Machine, string>>>;
  /** Probes that the estimate sets aside, with why. */
  readonly setAside: readonly { readonly point: PointId; readonly why: string }[];
  readonly spoken: readonly Spoken[];
  /** How long it has listened: a point may take its time before its silence is told. */
  readonly listeningMs: number;
  /** Expected degree-hours above the limit until the end of the night; null without a plan. */
  readonly expectedWarmKh: number | null;
}

/** Degree-hours from which a warm evening is worth a warning: two degrees over for two hours. */
const WARM_EVENING_KH = 4;

/** Interlocks that want a person; the others are the daily life of a plant. */
const FOR_PEOPLE = new Set([
  'high-pressure trip',
  'dry pump',
  'drip tray wet',
  'coil freeze',
  'inverter limit',
]);

export function alertsOf(signs: AlertSigns): ReadonlyMap<string, string> {
  const alerts = new Map<string, string>();
  if (signs.clock.why !== '') alerts.set('clock', signs.clock.why);
  if (signs.storeFault !== null) alerts.set('store', signs.storeFault);
  for (const [id, sentence] of staleAlerts(signs)) alerts.set(id, sentence);
  for (const { point, why } of signs.setAside)
    alerts.set(`aside-${topicId(point)}`, `The probe ${point} is set aside: ${why}`);
  for (const [machine, sentence] of Object.entries(signs.switchFaults))
    alerts.set(`switch-${machine}`, sentence);
  for (const word of signs.spoken) if (FOR_PEOPLE.has(word.id)) alerts.set(topicId(word.id), word.sentence);
  if (signs.config.chiller.rejects === 'cooled-room')
    alerts.set('heat-into-room', heatIntoRoom(signs.config));
  if (signs.expectedWarmKh !== null && signs.expectedWarmKh >= WARM_EVENING_KH) {
    alerts.set(
      'warm-evening',
      `Ice and machine will not hold the limit tonight: about ${Math.round(signs.expectedWarmKh)} degree-hours above it. Heat can kill: go to a cooler place in time.`,
    );
  }
  return alerts;
}

function staleAlerts({ config, live, listeningMs }: AlertSigns): [string, string][] {
  return Object.keys(config.points).flatMap((id): [string, string][] => {
    const point = live[id as PointId];
    const name = id.split('/')[0] as PointName;
    if (!('required' in POINTS[name]) || !point || point.value !== null) return [];
    if (point.reason === 'never-heard' && listeningMs < config.points[id].maxAgeMs) return [];
    const what = point.reason === 'never-heard' ? 'has not been heard yet' : 'is no longer heard';
    return [
      [
        `stale-${topicId(id)}`,
        `${id} ${what}: look at its battery, its radio and topic ${config.points[id].topic}.`,
      ],
    ];
  });
}

/** What a machine in the cooled room does to it, in the site's own figures. */
export function heatIntoRoom({ chiller }: SiteConfig): string {
  const gives = Math.round(chiller.iceMakingW + chiller.powerW);
  return `The ice machine stands in the cooled room: while it makes ${Math.round(chiller.iceMakingW)} W of ice it warms the room by ${gives} W. Each cycle leaves the room warmer by its own ${Math.round(chiller.powerW)} W; move it, or make ice only when nobody is home.`;
}

const topicId = (text: string): string => text.toLowerCase().replaceAll(/[^a-z0-9]+/g, '-');
