/**
 * A plan as one small blob: its columns as differences of whole steps, deflated. A plan of 36 h in quarter hours takes
 * about a tenth of its JSON. `planAsStored` gives it back as it will be read, for whoever shows it.
 */
import { deflateRawSync, inflateRawSync } from 'node:zlib';
import type { PlanRecord, PlanStep } from '../record.ts';

type NumberField = Exclude<keyof PlanStep, 'command'>;

const PER: Readonly<Record<NumberField, number>> = {
  startMs: 1,
  iceKwh: 1000,
  iceLowKwh: 1000,
  iceHighKwh: 1000,
  priceMoneyPerKwh: 100_000,
  outdoorC: 100,
  outdoorLowC: 100,
  outdoorHighC: 100,
  loadW: 1,
  loadLowW: 1,
  loadHighW: 1,
};
// oxlint-disable-next-line typescript/no-unsafe-type-assertion -- keys of the table above
const FIELDS = Object.keys(PER) as NumberField[];

interface Packed {
  readonly plan: Omit<PlanRecord, 'steps'>;
  readonly commands: readonly (readonly [command: PlanStep['command'], run: number])[];
  readonly columns: Readonly<Record<NumberField, readonly number[]>>;
}

export function packPlan(plan: PlanRecord): Uint8Array {
  const { steps, ...head } = plan;
  // oxlint-disable-next-line typescript/no-unsafe-type-assertion -- one column for each field
  const columns = Object.fromEntries(
    FIELDS.map((field) => [
      field,
      differences(steps.map((step) => Math.round(step[field] * PER[field]) + 0)),
    ]),
  ) as Record<NumberField, number[]>;
  const packed: Packed = { plan: head, commands: runs(steps.map((step) => step.command)), columns };
  return deflateRawSync(JSON.stringify(packed));
}

export function unpackPlan(blob: Uint8Array): PlanRecord {
  // oxlint-disable-next-line typescript/no-unsafe-type-assertion -- written by packPlan alone
  const packed = JSON.parse(inflateRawSync(blob).toString('utf8')) as Packed;
  const commands = packed.commands.flatMap(([command, run]) => Array.from({ length: run }, () => command));
  const column = (field: NumberField): number[] => sums(packed.columns[field], PER[field]);
  const startMs = column('startMs');
  const [ice, iceLow, iceHigh] = [column('iceKwh'), column('iceLowKwh'), column('iceHighKwh')];
  const [outdoor, outdoorLow, outdoorHigh] = [
    column('outdoorC'),
    column('outdoorLowC'),
    column('outdoorHighC'),
  ];
  const [load, loadLow, loadHigh] = [column('loadW'), column('loadLowW'), column('loadHighW')];
  const price = column('priceMoneyPerKwh');
  const steps = commands.map((command, i): PlanStep => ({
    startMs: startMs[i],
    command,
    iceKwh: ice[i],
    iceLowKwh: iceLow[i],
    iceHighKwh: iceHigh[i],
    priceMoneyPerKwh: price[i],
    outdoorC: outdoor[i],
    outdoorLowC: outdoorLow[i],
    outdoorHighC: outdoorHigh[i],
    loadW: load[i],
    loadLowW: loadLow[i],
    loadHighW: loadHigh[i],
  }));
  return { ...packed.plan, steps };
}

export function planAsStored(plan: PlanRecord): PlanRecord {
  return unpackPlan(packPlan(plan));
}

function differences(values: readonly number[]): number[] {
  return values.map((value, index) => (index === 0 ? value : value - values[index - 1]));
}

function sums(steps: readonly number[], per: number): number[] {
  let total = 0;
  return steps.map((step) => (total += step) / per);
}

function runs<T>(values: readonly T[]): [T, number][] {
  const out: [T, number][] = [];
  for (const value of values) {
    const last = out.at(-1);
    if (last && last[0] === value) last[1]++;
    else out.push([value, 1]);
  }
  return out;
}
