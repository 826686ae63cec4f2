import { describe, expect, it } from 'vitest';
import { createRandom } from '../../src/numerics/random.ts';
import { FUSION_J_PER_KG, ICE_DENSITY } from '../../src/physics/water.ts';
import { Shells } from '../../src/simulator/shells.ts';

const TUBE = { inward: false, wallRadiusM: 0.008, lengthM: 1, waterGain: 1 };
const CONTAINER = { inward: true, wallRadiusM: 0.075, lengthM: 1, waterGain: 2 };
const enthalpyJ = (shells: Shells): number => shells.wallJ[0] - FUSION_J_PER_KG * shells.iceKg(0);

describe('ice on a tube', () => {
  it('takes 1.651 h to grow from 8 to 25 mm radius at 5 K', () => {
    // Quasi-steady formula, published checks 3.1 (textbook result, from memory; value computed): k 2.22 W/(m K).
    // With this density and heat of fusion: t = ρL/(4kΔT) [2r² ln(r/a) − r² + a²].
    const shells = new Shells(1, TUBE, () => 0);
    const kg = ICE_DENSITY * Math.PI * (0.025 ** 2 - 0.008 ** 2);
    // The first 10 g take 8 s of the 5,900: short steps, or the thin shell would let an explicit step run away.
    shells.fill(0, [0.01, kg * 1.5], false);
    let steps = 0;
    while (shells.iceKg(0) < kg && steps < 400_000) {
      shells.exchange(0, -5, 1e9, 0.05);
      steps += 1;
    }
    const seconds = steps / 20;
    expect(seconds / 3600).toBeCloseTo(1.651, 2);
  });
});

describe('any history of warm and cold walls', () => {
  it.each([
    ['tube', TUBE],
    ['container', CONTAINER],
  ])('keeps mass and enthalpy on a %s', (_, geometry) => {
    const random = createRandom(3);
    const shells = new Shells(1, geometry, () => 1 + random.next());
    shells.fill(0, [2, 3, 4], false);
    const massKg = shells.totalKg(0);
    let bookJ = enthalpyJ(shells);
    let most = 0;
    let least = Number.POSITIVE_INFINITY;
    for (let i = 0; i < 20_000; i++) {
      const sourceC = (i % 700 < 350 ? -1 : 1) * 12 * random.next();
      bookJ += shells.exchange(0, sourceC, 5 + 40 * random.next(), 10);
      most = Math.max(most, shells.count[0]);
      least = Math.min(least, shells.iceKg(0));
    }
    // What was set free by remnants counted as ice is the bank's to collect: it has left the stack.
    bookJ -= shells.releasedJ;
    expect(least).toBeGreaterThanOrEqual(0);
    expect(most).toBeGreaterThan(2);
    expect(shells.totalKg(0)).toBeCloseTo(massKg, 9);
    // Against 9 kg of fusion heat, 3 MJ, turned over many times.
    expect(Math.abs(bookJ - enthalpyJ(shells))).toBeLessThan(1);
  });

  it('gives what is left of the outer ice back with the water under it', () => {
    const shells = new Shells(1, TUBE, () => 1);
    shells.fill(0, [1, 2], true);
    shells.wallJ[0] = 5000;
    const taken = shells.meltOuter(0, 3);
    expect(taken).toBe(2);
    expect(shells.count[0]).toBe(0);
    expect(shells.freedKg).toBeCloseTo(1, 12);
    expect(shells.freedJ).toBeCloseTo(5000, 6);
  });
});
