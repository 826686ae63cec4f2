import { spawn } from 'node:child_process';
import { createInterface } from 'node:readline';
import { describe, expect, it, onTestFinished } from 'vitest';
import { openStore } from '../../src/store/store.ts';
import { opened, scratchFile } from './scratch.ts';

const SCRIPT = new URL('writer-process.ts', import.meta.url).pathname;

/** Starts a process that writes and says what it has flushed; it is ours alone, and killed by its number. */
function startWriter(file: string): { pid: number; said: string[]; ended: Promise<unknown>; kill(): void } {
  const child = spawn(process.execPath, ['--import', 'tsx', SCRIPT, file], {
    stdio: ['ignore', 'pipe', 'inherit'],
  });
  const said: string[] = [];
  createInterface({ input: child.stdout }).on('line', (line) => said.push(line));
  const ended = new Promise((resolve) => child.once('close', resolve));
  onTestFinished(() => void child.kill('SIGKILL'));
  return { pid: child.pid ?? 0, said, ended, kill: () => void child.kill('SIGKILL') };
}

async function until(condition: () => boolean): Promise<void> {
  while (!condition()) await new Promise((resolve) => setTimeout(resolve, 10));
}

describe('kill -9', () => {
  it('takes nothing that was flushed, frees the lock by itself, and readers were never shut out', async () => {
    const file = scratchFile();
    const writer = startWriter(file);
    await until(() => writer.said.length >= 20);

    expect(() => openStore(file, { siteId: 'juniper' })).toThrow(new RegExp(`process ${writer.pid}`));
    const reader = opened(file, { readOnly: true });
    expect(reader.readingsBetween(0, Infinity).length).toBeGreaterThan(0);
    reader.close();

    writer.kill();
    await writer.ended;
    const [flushed] = writer.said.slice(-1).map(Number);
    const survivor = opened(file);
    expect(survivor.verify()).toEqual([]);
    const readings = survivor.readingsBetween(0, Infinity);
    const records = survivor.recordsBetween(0, Infinity);
    expect(readings.length).toBeGreaterThanOrEqual(flushed * 50);
    expect(readings.length % 50).toBe(0);
    expect(records.length).toBe(readings.length / 50);
    expect(readings.every((reading, index) => reading.value === index)).toBe(true);
  });
});
