/** Ten thousand plans leave nothing behind. */
import { setFlagsFromString } from 'node:v8';
import { runInNewContext } from 'node:vm';
import { expect, it } from 'vitest';
import { solvePlan } from '../../src/planning/plan.ts';
import { every, problem, scenario } from './problems.ts';

setFlagsFromString('--expose-gc');
const collect = runInNewContext('gc') as () => void;

function heldBytes(): number {
  collect();
  const { heapUsed, arrayBuffers } = process.memoryUsage();
  return heapUsed + arrayBuffers;
}

it('holds its memory over 10,000 solves', () => {
  const slots = 8;
  const p = problem(slots, {
    scenarios: [0, 1, 2, 3].map((k) => scenario(slots, { loadW: every(slots, (t) => 100 * k * t) })),
  });
  const fallBack = (note: string): never => {
    throw new Error(note);
  };
  const solveMany = (count: number): void => {
    for (let k = 0; k < count; k += 1) solvePlan({ ...p, iceKwh: (k % 50) / 10 }, { points: 11, fallBack });
  };
  solveMany(1000);
  const before = heldBytes();
  solveMany(10_000);
  // One solve of this size holds some 10 kB: a leak of a hundredth of that in each would show as a megabyte.
  expect(heldBytes() - before).toBeLessThan(1e6);
}, 60_000);
