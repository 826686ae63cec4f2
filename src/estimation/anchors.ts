/** Instruments that know the ice outright for a moment: thickness electrode, coolant and level of a full bank. */
import type { Core } from './core.ts';
import type { Moments } from './mixture.ts';
import type { Drive } from './models.ts';
import { marginal } from './report.ts';
import { X } from './layout.ts';
import type { Heard } from './update.ts';

/** Charging is stopped at the bank's limit: more than this, as a fraction of it, is hardly ever there. */
const MOST_ICE = 1.04;
/** Level this near the full level counts as full, mm. */
const LEVEL_NEAR_MM = 1;
/** The machine must have run this long before its coolant means a full bank. */
const SETTLED_S = 1200;

export function anchorsOf(core: Core, drive: Drive, nowMs: number): Heard['anchors'] {
  return [{ ice: MOST_ICE, side: 'at-most' }, ...electrode(core, nowMs), ...full(core, drive, nowMs)];
}

/** A change of the electrode is the moment itself; between changes it tells which side the ice is on. */
function electrode(core: Core, nowMs: number): Heard['anchors'] {
  const { electrodeIceKg, mostIceKg } = core.config.bank;
  const value = core.folder.held('ice-at-electrode', nowMs);
  if (electrodeIceKg === null || value === null) return [];
  const iced = value >= 0.5;
  const changed = core.electrode !== null && core.electrode !== iced;
  core.electrode = iced;
  const side = changed ? 'at' : iced ? 'at-least' : 'at-most';
  return [{ ice: electrodeIceKg / mostIceKg, side }];
}

/** Full is said once in a charge. What the ice was then is also news of the bank's capacity. */
function full(core: Core, drive: Drive, nowMs: number): Heard['anchors'] {
  if (drive.charging === 0) core.fullSaid = false;
  if (core.fullSaid || core.chargingS < SETTLED_S || !saysFull(core, nowMs)) return [];
  core.fullSaid = true;
  core.capacity = joined(core.capacity, marginal(core.beliefs, X.ice), core.config.bank.mostIceKg);
  return [{ ice: core.capacity.mean / core.config.bank.mostIceKg, side: 'at' }];
}

function saysFull(core: Core, nowMs: number): boolean {
  const { fullCoolantC, fullLevelMm } = core.config.bank;
  const coolantC = core.folder.held('coolant-supply', nowMs);
  const levelMm = core.folder.held('bank-level', nowMs);
  return (
    (fullCoolantC !== null && coolantC !== null && coolantC <= fullCoolantC) ||
    (fullLevelMm !== null && levelMm !== null && levelMm >= fullLevelMm - LEVEL_NEAR_MM)
  );
}

/** Spread of what "full" means from one charge to the next, part of the capacity; no source. */
const FULL_SPREAD = 0.05;

function joined(before: Moments, ice: Moments, mostIceKg: number): Moments {
  const seenSd = Math.hypot(ice.sd, FULL_SPREAD) * mostIceKg;
  const share = before.sd ** 2 / (before.sd ** 2 + seenSd ** 2);
  return {
    mean: before.mean + share * (ice.mean * mostIceKg - before.mean),
    sd: Math.max(0.01 * mostIceKg, before.sd * Math.sqrt(1 - share)),
  };
}
