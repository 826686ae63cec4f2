/** The entering probe drives the balance, so it is judged by what the coil in the room would have sent back. */
import type { Core } from './core.ts';
import { judgeProbe } from './consistency.ts';
import { correct, foresee, type Sense } from './filter.ts';
import { X } from './layout.ts';
import { varianceOf, type Alike } from './noise.ts';
import { enteringCOf, loopWPerKOf, type Drive } from './models.ts';
import { bestOf, type Circumstances } from './update.ts';

const COIL: Alike = { fresh: 0.1, alike: 0.8, lastsS: 3600 };
/** The coil's state, fans and moisture are known this well, K, when the probe itself is judged. */
const JUDGE_SD_K = 2.5;

/** Learns the coil from the probe, and sets a probe aside that no coil explains. */
export function judgeEntering(core: Core, now: Circumstances): void {
  const { drive } = now;
  if (drive.flowing === 0 || now.flowingS < 300 || core.models.internal) return;
  const readC = core.folder.fresh(core.swap.swapped ? 'leaving-water' : 'entering-water');
  const health = core.health.get('entering-water');
  if (readC === null || !health || !core.folder.everHeard('room-temperature')) return;
  const sense = coilSense(core, drive);
  const best = bestOf(core.beliefs);
  const found = foresee(best, sense, readC, JUDGE_SD_K ** 2, core.work);
  const fits = judgeProbe(health, {
    point: 'entering-water',
    readC,
    modelC: readC - found.innovation,
    innovation: found.innovation,
    variance: found.variance,
    dtS: drive.dtS,
    atMs: now.atMs,
    flowing: true,
  });
  if (!fits) return;
  for (const belief of core.beliefs) correct(belief, sense, readC, varianceOf(COIL, drive.dtS), core.work);
}

function coilSense(core: Core, drive: Drive): Sense {
  const blind: Drive = { ...drive, enteringC: null };
  return {
    states: [X.out, X.flow, X.coil, X.enteringOffset],
    predict: (x) =>
      enteringCOf(core.models, x, blind, loopWPerKOf(core.models, x, drive)) + x[X.enteringOffset],
  };
}
