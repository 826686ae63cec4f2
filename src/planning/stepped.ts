/**
 * The same problem with fewer, longer steps where nothing hangs on the quarter hour: the near hours are planned slot by
 * slot, later ones by pairs of slots. A command is then held for the pair; its circumstances are the means.
 */
import type { DemandTerms, GeneratorTerms, PlanProblem, PlanScenario } from './problem.ts';

/** Slots that are planned one by one: of a quarter hour each, the eight hours ahead. */
const NEAR_SLOTS = 32;
const PAIR = 2;

type Mean = (values: ArrayLike<number>) => Float64Array;

/** Steps of one slot at first, of two beyond; the first slot is never one of a pair, as it is partly over. */
export function stepped(problem: PlanProblem, nearSlots = NEAR_SLOTS): PlanProblem {
  const near = Math.min(problem.slots, Math.max(1, nearSlots));
  const count = near + Math.ceil((problem.slots - near) / PAIR);
  if (count === problem.slots) return problem;
  const spans = Uint8Array.from({ length: count }, (_, k) =>
    k < near ? 1 : Math.min(PAIR, problem.slots - near - (k - near) * PAIR),
  );
  const starts = Uint16Array.from(spans);
  spans.reduce((slot, span, k) => ((starts[k] = slot), slot + span), 0);
  const mean: Mean = (values) =>
    Float64Array.from(spans, (span, k) =>
      span === 1 ? values[starts[k]] : (values[starts[k]] + values[starts[k] + 1]) / 2,
    );
  return { ...averaged(problem, mean), slots: count, spans: { length: spans, start: starts } };
}

function averaged(problem: PlanProblem, mean: Mean): PlanProblem {
  const { power } = problem;
  const houseW = mean(power.houseW);
  return {
    ...problem,
    scenarios: problem.scenarios.map((s) => averagedScenario(s, mean)),
    limitC: mean(problem.limitC),
    surroundC: mean(problem.surroundC),
    power:
      power.kind === 'grid'
        ? {
            ...power,
            buy: mean(power.buy),
            sell: mean(power.sell),
            houseW,
            demand: power.demand && averagedDemand(power.demand, mean),
          }
        : { ...power, houseW, generator: power.generator && averagedGenerator(power.generator, mean) },
  };
}

function averagedScenario(scenario: PlanScenario, mean: Mean): PlanScenario {
  const { latentW } = scenario;
  return {
    ...scenario,
    outdoorC: mean(scenario.outdoorC),
    loadW: mean(scenario.loadW),
    ...(latentW ? { latentW: mean(latentW) } : {}),
    panelW: mean(scenario.panelW),
  };
}

/** A pair of which one slot is measured, or quiet, counts as that. */
const either = (values: Float64Array): Float64Array => values.map((value) => (value > 0 ? 1 : 0));

const averagedDemand = (demand: DemandTerms, mean: Mean): DemandTerms => ({
  ...demand,
  measured: either(mean(demand.measured)),
});

const averagedGenerator = (generator: GeneratorTerms, mean: Mean): GeneratorTerms => ({
  ...generator,
  quiet: either(mean(generator.quiet)),
});
