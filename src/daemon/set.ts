/** Settings that come over MQTT; each is refused with a sentence or taken and kept. */
import type { Strategy, Told, WishName } from '../commands.ts';
import { sentenceOf } from '../errors.ts';
import type { SettablePath } from '../mqtt/homie.ts';
import type { Clock } from '../time.ts';
import type { After, Daemon } from './daemon.ts';

/** Takes a setting; null when it is accepted, else why not. The effect comes a moment later: a burst of settings makes one plan. */
export function setByOwner(
  daemon: Daemon,
  clock: Clock,
  path: SettablePath,
  value: number | string,
): string | null {
  try {
    const after = take(daemon, clock, path, value);
    daemon.saveOwner();
    if (after !== null) daemon.soon(after);
    return null;
  } catch (error) {
    return sentenceOf(error);
  }
}

function take(daemon: Daemon, clock: Clock, path: SettablePath, value: number | string): After | null {
  const nowMs = clock.nowMs();
  switch (path) {
    case 'plan/strategy':
      daemon.owner.strategy(value as Strategy);
      return 'plan';
    case 'bank/told':
      if (value === 'nothing') daemon.takeBack();
      else daemon.tell(value as Told, null);
      return null;
    case 'dispatch/wish':
      daemon.owner.wish(value as WishName, daemon.owner.settings(nowMs).wishForMs, nowMs);
      return 'cycle';
    case 'dispatch/wish-for':
      daemon.owner.wishFor(Number(value), nowMs);
      return 'cycle';
    case 'comfort/limit':
      daemon.owner.limit(Number(value));
      return 'limit';
  }
}
