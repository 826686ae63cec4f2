/** `rimehold check`: whether the plant may run: the file, the database, the broker, and each point as it is heard. */
import type { SiteConfig } from '../config.ts';
import { heatIntoRoom } from '../dispatch/alerts.ts';
import { EXIT, RimeholdError, sentenceOf } from '../errors.ts';
import { BrokerClient } from '../mqtt/client.ts';
import { Intake, type PointStatus } from '../mqtt/intake.ts';
import { pointSpec, valueOf } from '../points.ts';
import { noted, PAPER_WIDTH, wrapped } from '../reports/paper.ts';
import { fixed } from '../reports/display.ts';
import {
  formatDuration,
  formatInstant,
  localClock,
  localDate,
  parseDuration,
  ZONE_DATA_VERSION,
} from '../time.ts';
import { shownIn, type DisplayUnits } from '../units.ts';
import { brokerOptions } from './broker.ts';
import { lookAtStore, type StoreLook } from './check-store.ts';
import { loadSite, secret } from './site.ts';
import { VERSION } from './version.ts';

interface PointLine {
  readonly point: string;
  readonly heard: boolean;
  readonly fresh: boolean;
  readonly value: number | null;
  readonly unit: string;
  readonly ageS: number | null;
  readonly required: boolean;
  readonly errorAtIcePointK: number | null;
  readonly errorSdK: number | null;
  readonly checked: string | null;
  readonly note: string;
}

/** What was heard at the broker: nothing when it could not be connected, not all when it refused a topic. */
interface Heard {
  readonly broker: string;
  readonly connected: boolean;
  readonly refused: readonly string[];
  readonly intake: Intake;
}

interface Verdict {
  readonly site: string;
  readonly version: string;
  readonly zoneData: string;
  readonly database: string;
  readonly broker: string;
  readonly points: readonly PointLine[];
  /** When the daemon last kept what it has learned; null before. */
  readonly learnedAt: string | null;
  readonly learned: NonNullable<StoreLook['estimate']>['learned'];
  readonly warnings: readonly string[];
  readonly mayRun: boolean;
}

export async function check(options: { config: string; listen: string; json?: boolean }): Promise<number> {
  const listenMs = parseDuration(options.listen);
  if (listenMs === null)
    throw new RimeholdError(
      'usage',
      `Expected --listen with an ISO 8601 duration such as PT30S, found "${options.listen}".`,
    );
  const config = loadSite(options.config);
  const { words: database, sound, estimate } = lookAtStore(config);
  const heard = config.broker.embedded
    ? unheard(config)
    : await listen(config, listenMs, options.json !== true);
  const points = heard.intake
    .status()
    .map((status) => pointLine(status, heard.intake, estimate?.probes ?? []));
  const missing = config.broker.embedded ? [] : points.filter((point) => point.required && !point.fresh);
  const locked = passphraseFault(config);
  const verdict: Verdict = {
    site: `${config.site.name} (${config.site.id})`,
    version: VERSION,
    zoneData: ZONE_DATA_VERSION,
    database,
    broker: heard.broker,
    points,
    learnedAt: estimate === null ? null : formatInstant(estimate.atMs),
    learned: estimate?.learned ?? [],
    warnings: warningsOf(config),
    mayRun: sound && locked === null && heard.connected && heard.refused.length === 0 && missing.length === 0,
  };
  const obstacles = [
    ...(locked === null ? [] : [`the page's passphrase must be readable (${locked})`]),
    ...(sound ? [] : ['the database must be usable']),
    ...(heard.connected ? [] : ['the broker must be reached']),
    ...(heard.refused.length === 0 ? [] : [`the broker must let this user read ${heard.refused.join(', ')}`]),
    ...(missing.length === 0 || !heard.connected
      ? []
      : [`${missing.map(({ point }) => point).join(', ')} must be heard`]),
  ];
  console.log(options.json ? JSON.stringify(verdict) : text(verdict, heard.connected, obstacles, config));
  return verdict.mayRun ? EXIT.yes : EXIT.no;
}

/** Why the passphrase of the page cannot be read: `run` refuses to start then. */
function passphraseFault({ web }: SiteConfig): string | null {
  try {
    secret('the passphrase', 'web.passphrase', web.passphraseFile, web.passphraseEnv);
    return null;
  } catch (error) {
    return sentenceOf(error).replace(/\.$/, '');
  }
}

function unheard(config: SiteConfig): Heard {
  const broker = 'embedded: nothing can be heard before `rimehold run` starts it';
  return { broker, connected: true, refused: [], intake: new Intake(config.points) };
}

/** Connects beside a running daemon, under a name of its own, and listens. */
async function listen(config: SiteConfig, listenMs: number, talk: boolean): Promise<Heard> {
  const intake = new Intake(config.points);
  const options = { ...brokerOptions(config, null), clientId: `rimehold-check-${process.pid}`, will: null };
  const client = new BrokerClient(options, {
    message: (message) => void intake.hear(message, Date.now()),
    state: () => undefined,
    note: () => undefined,
  });
  try {
    await client.start();
    const refused = await client.subscribe(
      intake.topics().map((filter) => ({ filter, qos: 1, retained: true })),
    );
    if (talk) console.error(`Listening for ${formatDuration(listenMs)} …`);
    await heardAll(intake, listenMs);
    return { broker: `${options.url}, MQTT ${client.version}`, connected: true, refused, intake };
  } catch (error) {
    return { broker: sentenceOf(error), connected: false, refused: [], intake };
  } finally {
    await client.stop();
  }
}

/** Waits until every point is fresh, or the time is over. */
async function heardAll(intake: Intake, listenMs: number): Promise<void> {
  const untilMs = Date.now() + listenMs;
  while (Date.now() < untilMs) {
    if (Object.values(intake.live(Date.now())).every((point) => point?.value != null)) return;
    await new Promise((done) => setTimeout(done, 100));
  }
}

type Probes = NonNullable<StoreLook['estimate']>['probes'];

function pointLine(status: PointStatus, intake: Intake, probes: Probes): PointLine {
  const nowMs = Date.now();
  const spec = pointSpec(status.id);
  const probe = probes.find(({ point }) => point === status.id);
  const series = spec?.kind === 'series';
  const fresh = series ? status.heard > 0 : valueOf(intake.live(nowMs), status.id) !== null;
  return {
    point: status.id,
    heard: status.lastHeardMs !== null,
    fresh,
    value: status.last?.value ?? status.undated?.value ?? status.quarantined?.value ?? null,
    unit: spec?.unit ?? '',
    ageS: status.last === null ? null : Math.max(0, Math.round((nowMs - status.last.atMs) / 1000)),
    required: spec?.required === true,
    errorAtIcePointK: probe?.errorAtIcePointK ?? null,
    errorSdK: probe?.errorAtIcePointK == null ? null : probe.sd,
    checked: probe?.atMs == null ? null : formatInstant(probe.atMs),
    note: noteOf(status, fresh),
  };
}

function noteOf(status: PointStatus, fresh: boolean): string {
  if (status.lastHeardMs === null) return `nothing on ${status.topic}`;
  if (status.lastFault !== null) return status.lastFault;
  if (status.quarantined !== null) return 'not plausible, not used';
  if (status.undated !== null) return 'kept by the broker, of unknown age';
  return fresh ? '' : 'too old';
}

function warningsOf(config: SiteConfig): string[] {
  const warnings: string[] = [];
  if (config.chiller.rejects === 'cooled-room') warnings.push(heatIntoRoom(config));
  if (Object.values(config.actuators).every((actuator) => actuator === null)) {
    warnings.push('No actuators are configured: rimehold publishes its command and switches nothing.');
  }
  return warnings;
}

function text(
  verdict: Verdict,
  connected: boolean,
  obstacles: readonly string[],
  { site }: SiteConfig,
): string {
  const points = [
    'point                    last value      age  ice point   note',
    ...verdict.points.flatMap((line) => rows(line, site.units)),
  ];
  return [
    ...wrapped(`${verdict.site}, rimehold ${verdict.version}, zone rules ${verdict.zoneData}`),
    ...noted('database', verdict.database, 10),
    ...noted('broker', verdict.broker, 10),
    '',
    ...(connected ? points : ['No point was listened for: the broker comes first.']),
    '',
    ...probeLines(verdict, site),
    ...learnedLines(verdict, site),
    ...verdict.warnings.flatMap((warning) => wrapped(warning)),
    ...wrapped(obstacles.length === 0 ? 'The plant may run.' : `Not yet: ${obstacles.join('; ')}.`),
  ].join('\n');
}

/** A point on one line, its note below it where both are too long for 80 columns. */
function rows(line: PointLine, units: DisplayUnits): string[] {
  const name = `${line.fresh ? ' ' : line.required ? '!' : '?'} ${line.point.padEnd(22)}`;
  const unusable = line.value === null && line.ageS === null;
  const head = unusable ? name : `${name} ${figures(line, units)}`;
  if (line.note === '') return [head.trimEnd()];
  const whole = `${head}   ${line.note}`;
  if (Array.from(whole).length <= PAPER_WIDTH) return [whole];
  return [head.trimEnd(), ...noted('', line.note, 4)];
}

function figures(line: PointLine, units: DisplayUnits): string {
  const shown = shownIn(line.value ?? 0, line.unit, units);
  // finer than on the page: probes are compared here
  const value = line.value === null ? '–' : `${Number(shown.value.toFixed(2))} ${shown.unit}`.trim();
  const age = line.ageS === null ? '–' : `${line.ageS} s`;
  const error =
    line.errorAtIcePointK === null
      ? '–'
      : `${line.errorAtIcePointK >= 0 ? '+' : ''}${shownText(line.errorAtIcePointK, 'K', units)}`;
  return `${value.padStart(10)} ${age.padStart(8)} ${error.padStart(10)}`;
}

function shownText(value: number, unit: string, units: DisplayUnits): string {
  const shown = shownIn(value, unit, units);
  return `${fixed(shown.value, shown.digits)} ${shown.unit}`.trim();
}

/** When ice last checked each probe, and how sure its error is. */
function probeLines({ points }: Verdict, { units, zone }: SiteConfig['site']): string[] {
  const lines = points.flatMap(({ point, errorAtIcePointK, errorSdK, checked }) =>
    errorAtIcePointK === null || errorSdK === null || checked === null
      ? []
      : `  ${point.padEnd(24)} ${shownText(errorAtIcePointK, 'K', units)} ± ${shownText(errorSdK, 'K', units)}, checked by ice on ${localDate(zone, Date.parse(checked))}`,
  );
  return lines.length === 0 ? [] : ['probes at the ice point, as the daemon last kept them', ...lines, ''];
}

function learnedLines({ learned, learnedAt }: Verdict, { units, zone }: SiteConfig['site']): string[] {
  if (learnedAt === null) return [];
  const atMs = Date.parse(learnedAt);
  const head = `learned of this plant, as the daemon kept it on ${localDate(zone, atMs)} at ${localClock(zone, atMs)}`;
  const lines = learned.map(
    ({ name, value, sd, unit }) =>
      `  ${name.padEnd(24)} ${shownText(value, unit, units)} ± ${shownText(sd, unit, units)}`,
  );
  return [head, ...lines, ''];
}
