/** `rimehold check`: whether the plant may run: the file, the database, the broker, and each point as it is heard. */
import { existsSync } from 'node:fs';
import type { SiteConfig } from '../config.ts';
import { heatIntoRoom } from '../dispatch/alerts.ts';
import { EXIT, RimeholdError, sentenceOf } from '../errors.ts';
import { BrokerClient } from '../mqtt/client.ts';
import { Intake, type PointStatus } from '../mqtt/intake.ts';
import { pointSpec, valueOf } from '../points.ts';
import type { ProbeState } from '../reports/coverage.ts';
import { readSheet } from '../reports/night-schema.ts';
import { noted, PAPER_WIDTH, wrapped } from '../reports/paper.ts';
import { formatDuration, formatInstant, parseDuration, ZONE_DATA_VERSION } from '../time.ts';
import { brokerOptions } from './broker.ts';
import { loadSite, siteStore } from './site.ts';
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
  const { words: database, sound, probes } = checkStore(config);
  const heard = config.broker.embedded
    ? unheard(config)
    : await listen(config, listenMs, options.json !== true);
  const points = heard.intake.status().map((status) => pointLine(status, heard.intake, probes));
  const missing = config.broker.embedded ? [] : points.filter((point) => point.required && !point.fresh);
  const verdict: Verdict = {
    site: `${config.site.name} (${config.site.id})`,
    version: VERSION,
    zoneData: ZONE_DATA_VERSION,
    database,
    broker: heard.broker,
    points,
    warnings: warningsOf(config),
    mayRun: sound && heard.connected && heard.refused.length === 0 && missing.length === 0,
  };
  const obstacles = [
    ...(sound ? [] : ['the database must be usable']),
    ...(heard.connected ? [] : ['the broker must be reached']),
    ...(heard.refused.length === 0 ? [] : [`the broker must let this user read ${heard.refused.join(', ')}`]),
    ...(missing.length === 0 || !heard.connected
      ? []
      : [`${missing.map(({ point }) => point).join(', ')} must be heard`]),
  ];
  console.log(options.json ? JSON.stringify(verdict) : text(verdict, heard.connected, obstacles));
  return verdict.mayRun ? EXIT.yes : EXIT.no;
}

function checkStore(config: SiteConfig): { words: string; sound: boolean; probes: readonly ProbeState[] } {
  const { file } = config.store;
  if (!existsSync(file))
    return { words: `${file} is not there yet; the first run makes it`, sound: true, probes: [] };
  try {
    const store = siteStore(config, true);
    try {
      const faults = store.verify();
      const probes = lastProbes(store.sheets().at(-1)?.body ?? null);
      return faults.length === 0
        ? { words: `${file} is sound`, sound: true, probes }
        : { words: `${file} is damaged: ${faults[0]}; put a backup in its place`, sound: false, probes };
    } finally {
      store.close();
    }
  } catch (error) {
    return { words: sentenceOf(error), sound: false, probes: [] };
  }
}

/** What the last night sheet says of each probe at 0 °C. */
function lastProbes(body: string | null): readonly ProbeState[] {
  const sheet = body === null ? null : readSheet(body);
  return (sheet?.probes ?? []).map(({ point, errorAtIcePointK, errorSdK, checked, setAside }) => ({
    point: point as ProbeState['point'],
    errorAtIcePointK,
    sd: errorSdK,
    atMs: checked === null ? null : Date.parse(checked),
    setAside,
  }));
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

function pointLine(status: PointStatus, intake: Intake, probes: readonly ProbeState[]): PointLine {
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

function text(verdict: Verdict, connected: boolean, obstacles: readonly string[]): string {
  const points = [
    'point                    last value      age    at 0 °C   note',
    ...verdict.points.flatMap(rows),
  ];
  return [
    ...wrapped(`${verdict.site}, rimehold ${verdict.version}, zone rules ${verdict.zoneData}`),
    ...noted('database', verdict.database, 10),
    ...noted('broker', verdict.broker, 10),
    '',
    ...(connected ? points : ['No point was listened for: the broker comes first.']),
    '',
    ...verdict.warnings.flatMap((warning) => wrapped(warning)),
    ...wrapped(obstacles.length === 0 ? 'The plant may run.' : `Not yet: ${obstacles.join('; ')}.`),
  ].join('\n');
}

/** A point on one line, its note below it where both are too long for 80 columns. */
function rows(line: PointLine): string[] {
  const name = `${line.fresh ? ' ' : line.required ? '!' : '?'} ${line.point.padEnd(22)}`;
  const unusable = line.value === null && line.ageS === null;
  const head = unusable ? name : `${name} ${figures(line)}`;
  if (line.note === '') return [head.trimEnd()];
  const whole = `${head}   ${line.note}`;
  if (Array.from(whole).length <= PAPER_WIDTH) return [whole];
  return [head.trimEnd(), ...noted('', line.note, 4)];
}

function figures(line: PointLine): string {
  const value = line.value === null ? '–' : `${Number(line.value.toFixed(2))} ${line.unit}`;
  const age = line.ageS === null ? '–' : `${line.ageS} s`;
  const error =
    line.errorAtIcePointK === null
      ? '–'
      : `${line.errorAtIcePointK >= 0 ? '+' : '−'}${Math.abs(line.errorAtIcePointK).toFixed(2)} K`;
  return `${value.padStart(10)} ${age.padStart(8)} ${error.padStart(10)}`;
}
