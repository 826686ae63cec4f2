/** A disk that is full: under the daemon, under an import, under a backup. */
import { execFileSync } from 'node:child_process';
import { readdirSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { hasMosquitto } from '../mqtt/mosquitto.ts';
import { until, type Observer } from '../mqtt/observer.ts';
import { look, PATIENCE_MS, plant, ready, stored, TIMED, valuesIn } from './plant.ts';
import {
  expectNoInsides,
  expectRefusal,
  expectSentence,
  ownFolder,
  rimehold,
  rimeholdAs,
  startDaemon,
  writeSite,
} from './stranger.ts';

const hasPrlimit = prlimitWorks();

function prlimitWorks(): boolean {
  try {
    execFileSync('prlimit', ['--version'], { stdio: 'pipe' });
    return true;
  } catch {
    console.warn('SKIPPED: prlimit is not installed; the full disk is not tried (it comes with util-linux).');
    return false;
  }
}

describe.skipIf(!hasPrlimit)('a full disk', () => {
  /** Files may not be written (or may again), as on a full disk: SQLite meets EFBIG where it would meet ENOSPC. */
  const room = (pid: number, bytes: '0' | 'unlimited'): void => {
    execFileSync('prlimit', ['--pid', String(pid), `--fsize=${bytes}:unlimited`]);
  };

  it.skipIf(!hasMosquitto)(
    'stops nothing: what comes waits in memory and is written when there is room again',
    async () => {
      const { url, folder, observer, publish } = await plant();
      writeSite(folder, {
        url,
        changes: [TIMED],
        store: 'file: juniper.db, flush: PT1S',
        cycle: 'PT5S',
        log: 'level: info',
      });
      const daemon = await startDaemon(folder);
      await ready(observer);
      const before = await publish(5);
      await stored(folder, (count) => count === 5);

      room(daemon.pid, '0');
      const fullMs = Date.now();
      const during = await publish(30);
      await until('a word of it', () => daemon.err().includes('juniper.db'), PATIENCE_MS);
      await until(
        'an alert',
        () => alerts(observer).some((text) => text.includes('juniper.db')),
        PATIENCE_MS,
      );
      const records = (): number =>
        observer.seen.filter(({ topic }) => topic.endsWith('/dispatch/order')).length;
      const then = records();
      await until('another command', () => records() > then, PATIENCE_MS);
      expect(look(folder, valuesIn)).toEqual(before);

      room(daemon.pid, 'unlimited');
      await stored(folder, (count) => count === 35);
      expect(look(folder, valuesIn)).toEqual([...before, ...during]);
      expect(look(folder, (store) => store.recordsBetween(fullMs, Infinity).length)).toBeGreaterThan(0);
      await until('a word that it is over', () => daemon.err().includes('takes data again'), PATIENCE_MS);

      room(daemon.pid, '0');
      await publish(7);
      daemon.signal('SIGTERM');
      const { status, err } = await daemon.ended;
      expect(status).toBe(3);
      expectNoInsides(err);
      const last = err.trimEnd().split('\n').at(-1) ?? '';
      expectSentence(`${last}\n`);
      expect(last).toMatch(/\d+ readings and \d+ records .*juniper\.db.*free some space/);
      expect(look(folder, (store) => store.verify(), false)).toEqual([]);
      expect(look(folder, valuesIn)).toEqual([...before, ...during]);
    },
  );

  it('while a log comes in says so (3), and the same import later brings all of it once', async () => {
    const folder = ownFolder();
    writeSite(folder);
    look(folder, () => undefined, false);
    const lines = Array.from({ length: 20_000 }, (_, index) => {
      const at = new Date(Date.UTC(2026, 6, 14) + index * 1000).toISOString();
      return `${at},leaving-water,${4 + (index % 100) / 100}`;
    });
    writeFileSync(join(folder, 'july.csv'), `time,point,value\n${lines.join('\n')}\n`);
    const ended = await rimeholdAs({ mostFileBytes: 300_000 }, folder, 'import', 'july.csv');
    expectRefusal(ended, 3, 'juniper.db', 'july.csv', 'disk full', 'free some space');
    expect(look(folder, valuesIn).length).toBeLessThan(lines.length);

    expect(await rimehold(folder, 'import', 'july.csv')).toMatchObject({ status: 0, err: '' });
    expect(look(folder, valuesIn)).toHaveLength(lines.length);
  });

  it('while a copy is made leaves no half of one (3)', async () => {
    const folder = ownFolder();
    writeSite(folder);
    look(folder, () => undefined, false);
    const ended = await rimeholdAs({ mostFileBytes: 40_000 }, folder, 'backup', 'copy.db');
    expectRefusal(ended, 3, 'copy.db', 'disk full', 'free some space');
    expect(readdirSync(folder).filter((name) => name.startsWith('copy'))).toEqual([]);
  });
});

const alerts = ({ seen }: Observer): string[] =>
  seen.filter(({ topic }) => topic.includes('/$alert/')).map(({ text }) => text);
