import { describe, expect, it } from 'vitest';
import { rk4 } from '../../src/numerics/ode.ts';

type Derivative = Parameters<typeof rk4>[0];

function run(derivative: Derivative, start: readonly number[], until: number, steps: number): number[] {
  const dt = until / steps;
  let y = [...start];
  for (let i = 0; i < steps; i++) y = rk4(derivative, y, i * dt, dt);
  return y;
}

/** y' = -y + sin t from y(0) = 1. */
const exact = (t: number): number => 1.5 * Math.exp(-t) + (Math.sin(t) - Math.cos(t)) / 2;
const error = (steps: number): number =>
  Math.abs(run((y, t) => [-y[0] + Math.sin(t)], [1], 3, steps)[0] - exact(3));

describe('rk4', () => {
  it('is of fourth order: half the step, a sixteenth of the error', () => {
    expect(error(20) / error(40)).toBeGreaterThan(14);
    expect(error(20) / error(40)).toBeLessThan(18);
  });

  it('keeps the energy of an oscillator and leaves its input alone', () => {
    const start = Object.freeze([1, 0]);
    const [x, v] = run((y) => [y[1], -y[0]], start, 2 * Math.PI, 200);
    expect(x).toBeCloseTo(1, 7);
    expect(v).toBeCloseTo(0, 6);
  });
});
