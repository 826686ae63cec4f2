/** Who may speak on `$log`: the owner's least level, each sentence once in a while, never a flood. Pure. */
import { MINUTE_MS } from '../time.ts';

const LEVELS = ['info', 'warn', 'error'] as const;
export type LogLevel = (typeof LEVELS)[number];

/** The same sentence again only after this long. */
const REPEAT_MS = 10 * MINUTE_MS;
/** Sentences in one minute, all together. */
const MOST_A_MINUTE = 10;

export class LogVoice {
  readonly #least: number;
  readonly #nowMs: () => number;
  readonly #told = new Map<string, number>();
  #minuteMs = 0;
  #inMinute = 0;

  constructor(least: 'none' | LogLevel, nowMs: () => number) {
    this.#least = least === 'none' ? LEVELS.length : LEVELS.indexOf(least);
    this.#nowMs = nowMs;
  }

  mayTell(level: LogLevel, sentence: string): boolean {
    if (LEVELS.indexOf(level) < this.#least) return false;
    const nowMs = this.#nowMs();
    // distances by amount: a clock that was set back must not silence the device
    if (Math.abs(nowMs - this.#minuteMs) >= MINUTE_MS) {
      this.#minuteMs = nowMs;
      this.#inMinute = 0;
      for (const [text, atMs] of this.#told) if (Math.abs(nowMs - atMs) >= REPEAT_MS) this.#told.delete(text);
    }
    if (this.#told.has(sentence) || this.#inMinute >= MOST_A_MINUTE) return false;
    this.#told.set(sentence, nowMs);
    this.#inMinute += 1;
    return true;
  }
}
