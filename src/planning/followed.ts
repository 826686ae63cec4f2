/**
 * What a simple strategy will do over the hours of a plan, and what that is expected to come to: its rule is asked at
 * every slot, for the ice and the machine as they will be then in the mean of the weather. Each scenario then lives
 * through these commands, so that the band shows what the weather alone can change.
 */
import { COMMANDS, type Strategy } from '../commands.ts';
import { advance } from './evaluate.ts';
import { live, standingNow } from './forward.ts';
import { isOn } from './machine-states.ts';
import { partFrom } from './part.ts';
import { stepsOf, type Plan } from './plan.ts';
import { slotStartMs, type PlanProblem, type PlanScenario } from './problem.ts';
import { createWork } from './solve.ts';
import { simpleCommand } from './strategies.ts';
import { buildTables } from './tables.ts';
import type { TimetableLine } from './timetable.ts';

const POINTS = 61;

/** `plan` with the steps and the expectations of the strategy in place of its own. */
export function followed(
  strategy: Exclude<Strategy, 'planned'>,
  problem: PlanProblem,
  timetable: readonly TimetableLine[],
  plan: Plan,
): Plan {
  if (plan.outcome !== 'solved') return { ...plan, strategy };
  const commands = commandsOf(strategy, problem, timetable);
  const work = createWork(problem, {}, buildTables(problem, POINTS), 1);
  const paths = live(work, (t) => commands[t]);
  const steps = stepsOf(work, paths);
  const command = COMMANDS[commands[0]];
  return {
    ...plan,
    strategy,
    steps,
    command,
    nextChangeMs: steps.find((step) => step.command !== command)?.startMs ?? null,
    waitCostMoney: null,
    flips: { priceMoneyPerKwh: null, iceKwh: null },
    expectedCostMoney: paths.expectedMoney,
    expectedWarmKh: paths.expectedWarmKh,
    servesRooms: true,
    meltsOut: false,
  };
}

/** The strategy's command at each slot along the mean weather, by number. */
function commandsOf(
  strategy: Exclude<Strategy, 'planned'>,
  problem: PlanProblem,
  timetable: readonly TimetableLine[],
): Uint8Array {
  const mean = { ...problem, scenarios: [meanScenario(problem)] };
  const work = createWork(mean, {}, buildTables(mean, POINTS), 1);
  const at = standingNow(work);
  let since = problem.chillerSinceMs;
  const commands = new Uint8Array(problem.slots);
  for (let t = 0; t < problem.slots; t += 1) {
    const chillerOn = isOn(work.states, at.machine);
    const view = {
      ...partFrom(mean, t),
      iceKwh: at.iceKwh,
      chillerOn,
      chillerSinceMs: since,
      // How warm the rooms will be is not foreseen: later, the load alone asks for cooling.
      ...(t > 0 ? { roomC: null } : {}),
    };
    commands[t] = COMMANDS.indexOf(simpleCommand(strategy, view, timetable));
    advance(work, t, 0, at, commands[t]);
    if (isOn(work.states, at.machine) !== chillerOn) since = slotStartMs(problem, t);
  }
  return commands;
}

function meanScenario({ scenarios }: PlanProblem): PlanScenario {
  const total = scenarios.reduce((sum, s) => sum + s.weight, 0);
  const none = new Float64Array(scenarios[0].loadW.length);
  const mean = (series: (s: PlanScenario) => ArrayLike<number>): Float64Array =>
    Float64Array.from(series(scenarios[0]), (_, t) =>
      scenarios.reduce((sum, s) => sum + (s.weight / total) * series(s)[t], 0),
    );
  return {
    weight: 1,
    outdoorC: mean((s) => s.outdoorC),
    loadW: mean((s) => s.loadW),
    latentW: mean((s) => s.latentW ?? none),
    panelW: mean((s) => s.panelW),
    warmKhPerKwh: scenarios.reduce((sum, s) => sum + (s.weight / total) * s.warmKhPerKwh, 0),
  };
}
