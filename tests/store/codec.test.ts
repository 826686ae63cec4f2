import * as fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { planAsStored } from '../../src/store/plan-codec.ts';
import {
  asStored,
  fromRow,
  joinFigures,
  splitFigures,
  toRow,
  type Dictionary,
} from '../../src/store/record-codec.ts';
import { baseRecord, tellNight, tellPlan } from '../reports/night-story.ts';
import { nightOf } from '../../src/time.ts';

function dictionary(): Dictionary {
  const texts: string[] = [];
  return {
    idOf: (text) => (texts.includes(text) ? texts.indexOf(text) : texts.push(text) - 1),
    textOf: (id) => texts[id],
  };
}

describe('record codec', () => {
  it('gives back what asStored says, for a whole night', () => {
    const words = dictionary();
    const night = nightOf('Europe/Madrid', '2026-07-14');
    const records = tellNight({ zone: 'Europe/Madrid', night, stepMs: 300_000 });
    expect(records).toHaveLength(288);
    for (const record of records) expect(fromRow(toRow(record, words), words)).toEqual(asStored(record));
  });

  it('rounds no number by more than half its step, and no time at all', () => {
    const record = baseRecord(1_784_000_000_123, 30_000);
    const kept = asStored({
      ...record,
      leavingWaterC: 0.4321987,
      chillerPowerW: 512.3456,
      planMadeMs: 1_783_999_999_877,
    });
    expect(Math.abs((kept.leavingWaterC ?? 9) - 0.4321987)).toBeLessThanOrEqual(0.0005);
    expect(Math.abs((kept.chillerPowerW ?? 9) - 512.3456)).toBeLessThanOrEqual(0.05);
    expect(kept.planMadeMs).toBe(1_783_999_999_877);
    expect(asStored(kept)).toEqual(kept);
  });

  it('refuses a number that is none instead of storing it', () => {
    const broken = { ...baseRecord(0, 30_000), iceOnHandKwh: Number.NaN };
    expect(() => toRow(broken, dictionary())).toThrow(/iceOnHandKwh/);
    expect(() => asStored(broken)).toThrow(/iceOnHandKwh/);
  });

  it('splits and joins any sentence', () => {
    fc.assert(
      fc.property(fc.string({ unit: 'binary' }), (text) => {
        const { words, figures } = splitFigures(text);
        expect(joinFigures(words, figures)).toBe(text);
      }),
    );
    fc.assert(
      fc.property(
        fc.array(
          fc.oneof(fc.double(), fc.integer(), fc.constantFrom(' ct until ', ':', ', ', '|', '\u0001')),
          { maxLength: 12 },
        ),
        (parts) => {
          const text = parts.join('');
          const { words, figures } = splitFigures(text);
          expect(joinFigures(words, figures)).toBe(text);
        },
      ),
    );
  });
});

describe('plan codec', () => {
  it('keeps times, commands and heads exactly and numbers to their step', () => {
    const plan = tellPlan('Europe/Madrid', 1_784_000_000_123);
    const kept = planAsStored(plan);
    expect({ ...kept, steps: [] }).toEqual({ ...plan, steps: [] });
    expect(kept.steps.map((step) => [step.startMs, step.command])).toEqual(
      plan.steps.map((step) => [step.startMs, step.command]),
    );
    for (const [index, step] of kept.steps.entries()) {
      expect(Math.abs(step.iceKwh - plan.steps[index].iceKwh)).toBeLessThanOrEqual(0.0005);
      expect(Math.abs(step.outdoorC - plan.steps[index].outdoorC)).toBeLessThanOrEqual(0.005);
      expect(Math.abs(step.loadW - plan.steps[index].loadW)).toBeLessThanOrEqual(0.5);
    }
    expect(planAsStored(kept)).toEqual(kept);
  });

  it('keeps a plan without steps', () => {
    const empty = { ...tellPlan('UTC', 0), steps: [] };
    expect(planAsStored(empty)).toEqual(empty);
  });
});
