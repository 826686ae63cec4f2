/** `rimehold run`: the daemon, until it is told to stop. */
import type { SiteConfig } from '../config.ts';
import { EXIT, RimeholdError } from '../errors.ts';
import type { Running } from '../main.ts';
import { renderText } from '../reports/render-text.ts';
import { createLapseClock } from '../simulator/lapse-clock.ts';
import { parseInstant, type Clock } from '../time.ts';
import { loadSite } from './site.ts';
import { systemClock } from './system-clock.ts';

export interface RunOptions {
  readonly config: string;
  readonly lapse?: string;
  readonly epoch?: string;
}

export async function run(options: RunOptions): Promise<number> {
  const config = loadSite(options.config);
  const { clock, clockRate } = clockOf(options);
  // Listened for from the start: a signal that comes while it starts ends it as cleanly as any other.
  const asked = stopSignal();
  // Loaded only now: a fault in the site file is told at once, also on a small machine.
  const { startSite } = await import('../main.ts');
  const starting = startSite(config, { clock, clockRate });
  const running = await Promise.race([starting, asked]);
  if (running === undefined) return stopWhileStarting(starting);
  printSheets(config, running);
  console.error(
    `rimehold watches ${config.site.name} through ${running.brokerUrl}${running.pageUrl === null ? '' : `; its page is at ${running.pageUrl}`}`,
  );
  const fault = await Promise.race([asked, running.givenUp]);
  await running.stop();
  if (fault instanceof RimeholdError) throw fault;
  return EXIT.yes;
}

/** A broker that does not answer may hold the start for long; then nothing runs yet that would need a goodbye. */
async function stopWhileStarting(starting: Promise<Running>): Promise<never> {
  const stopped = starting.then((running) => running.stop()).catch(() => undefined);
  await Promise.race([stopped, new Promise((done) => setTimeout(done, MOST_WAIT_MS))]);
  process.exit(EXIT.yes);
}
const MOST_WAIT_MS = 2000;

export function printSheets(config: SiteConfig, { daemon }: Running): void {
  if (config.nights.print)
    daemon.observe({ night: (sheet) => void process.stdout.write(`${renderText(sheet)}\n`) });
}

function clockOf({ lapse, epoch }: RunOptions): { clock: Clock; clockRate: number } {
  if (lapse === undefined && epoch === undefined) return { clock: systemClock(), clockRate: 1 };
  const factor = Number(lapse ?? '1');
  if (!(factor > 0 && factor <= 100_000)) {
    throw new RimeholdError(
      'usage',
      `Expected --lapse with a factor above 0 and up to 100000, found "${lapse}".`,
    );
  }
  const epochMs = epoch === undefined ? Date.now() : parseInstant(epoch);
  if (epochMs === null) {
    throw new RimeholdError(
      'usage',
      `Expected --epoch with a time as 2026-07-14T12:00:00Z, found "${epoch}".`,
    );
  }
  return {
    clock: createLapseClock({ epochMs, factor, realNowMs: () => performance.now() }),
    clockRate: factor,
  };
}

/** Resolves at the first SIGINT or SIGTERM; a second one ends the process at once. */
export function stopSignal(): Promise<void> {
  return new Promise((resolve) => {
    const once = (): void => {
      resolve();
      process.once('SIGINT', () => process.exit(EXIT.couldNotRun));
    };
    process.once('SIGINT', once);
    process.once('SIGTERM', once);
  });
}
