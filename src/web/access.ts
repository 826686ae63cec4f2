/** Who may change something: the owner's passphrase, the sessions that it opens, and a brake on guessing. */
import { createHmac, randomBytes, timingSafeEqual } from 'node:crypto';

const SESSION_MS = 12 * 3_600_000;
const MOST_SESSIONS = 32;

/** Compares in time that depends on neither text: both are hashed under a key that nobody knows. */
export function createPassphraseCheck(passphrase: string): (offered: string) => boolean {
  const key = randomBytes(32);
  const digest = (text: string): Buffer => createHmac('sha256', key).update(text, 'utf8').digest();
  const expected = digest(passphrase);
  return (offered) => timingSafeEqual(digest(offered), expected);
}

export interface Sessions {
  /** Opens a session and returns its token. */
  open(nowMs: number): string;
  holds(token: string | undefined, nowMs: number): boolean;
  close(token: string | undefined): void;
}

/** Sessions live in memory only: a restart signs everybody out. `nowMs` is any monotonic time. */
export function createSessions(): Sessions {
  const ends = new Map<string, number>();
  const key = randomBytes(32);
  const stored = (token: string): string => createHmac('sha256', key).update(token).digest('base64');
  return {
    open(nowMs) {
      const token = randomBytes(32).toString('base64url');
      ends.set(stored(token), nowMs + SESSION_MS);
      const oldest = ends.keys().next().value;
      if (ends.size > MOST_SESSIONS && oldest !== undefined) ends.delete(oldest);
      return token;
    },
    holds(token, nowMs) {
      const endMs = token === undefined ? undefined : ends.get(stored(token));
      return endMs !== undefined && nowMs < endMs;
    },
    close(token) {
      if (token !== undefined) ends.delete(stored(token));
    },
  };
}

export const SESSION_SECONDS = SESSION_MS / 1000;

const FREE_FAILURES = 5;
const FIRST_PAUSE_MS = 30_000;
const LONGEST_PAUSE_MS = 15 * 60_000;
/** A caller with no failure for this long starts afresh. */
const FORGET_MS = 60 * 60_000;
const MOST_CALLERS = 1000;

export interface FailureBrake {
  /** Milliseconds that the caller has yet to wait; 0 when it may try. */
  waitMs(caller: string, nowMs: number): number;
  failed(caller: string, nowMs: number): void;
  succeeded(caller: string): void;
}

interface Failures {
  readonly count: number;
  readonly lastMs: number;
}

/** Five attempts are free; each further failure doubles a pause, from half a minute to a quarter of an hour. */
export function createFailureBrake(): FailureBrake {
  const failures = new Map<string, Failures>();
  return {
    waitMs(caller, nowMs) {
      const past = failures.get(caller);
      return past ? Math.max(0, past.lastMs + pauseMs(past.count) - nowMs) : 0;
    },
    failed(caller, nowMs) {
      const past = failures.get(caller);
      const count = past && nowMs - past.lastMs < FORGET_MS ? past.count + 1 : 1;
      failures.delete(caller);
      failures.set(caller, { count, lastMs: nowMs });
      const oldest = failures.keys().next().value;
      if (failures.size > MOST_CALLERS && oldest !== undefined) failures.delete(oldest);
    },
    succeeded(caller) {
      failures.delete(caller);
    },
  };
}

function pauseMs(count: number): number {
  if (count < FREE_FAILURES) return 0;
  return Math.min(LONGEST_PAUSE_MS, FIRST_PAUSE_MS * 2 ** (count - FREE_FAILURES));
}
