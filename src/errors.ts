/**
 * The one error class. `code` says which kind of thing failed, the message is one sentence for a person
 * (what was expected, what was found, where, what to do), `context` is for the log.
 */
export type ErrorCode =
  | 'usage'
  | 'config'
  | 'broker-unreachable'
  | 'broker-refused'
  | 'port-in-use'
  | 'store-newer'
  | 'store-busy'
  | 'store-full'
  | 'store-broken'
  | 'file-unreadable'
  | 'file-unwritable'
  | 'payload'
  | 'internal';

export class RimeholdError extends Error {
  readonly code: ErrorCode;
  readonly context: Readonly<Record<string, unknown>>;

  constructor(
    code: ErrorCode,
    message: string,
    context: Readonly<Record<string, unknown>> = {},
    options?: ErrorOptions,
  ) {
    super(message, options);
    this.name = 'RimeholdError';
    this.code = code;
    this.context = context;
  }
}

/** Exit statuses of every verb: 0 yes · 1 the answer is no · 2 wrong use · 3 could not run. */
export const EXIT = { yes: 0, no: 1, wrongUse: 2, couldNotRun: 3 } as const;

/** Which exit status an error leads to: a fault that the person at the keyboard typed is 2, all else 3. */
export function exitStatusOf(error: unknown): number {
  return error instanceof RimeholdError && (error.code === 'usage' || error.code === 'config')
    ? EXIT.wrongUse
    : EXIT.couldNotRun;
}

/** The sentence of any thrown value; never empty. */
export function sentenceOf(error: unknown): string {
  if (error instanceof Error) return error.message || error.name;
  return String(error);
}

const SYSTEM_WORDS: Readonly<Record<string, string>> = {
  ENOENT: 'there is no such file or folder',
  ENOTDIR: 'a part of its path is no folder',
  EACCES: 'this user has no right to it',
  EPERM: 'this user has no right to it',
  EROFS: 'its disk is read-only',
  ENOSPC: 'its disk is full',
  EISDIR: 'it is a folder',
};

/** Why the system refused a file, in plain words. */
export function systemWords(error: unknown): string {
  const code = error instanceof Error && 'code' in error ? String(error.code) : '';
  return SYSTEM_WORDS[code] ?? sentenceOf(error);
}

/** What was found, fit for a terminal: a whole file, or a binary one, may stand where one word was expected. */
export function printable(text: string, most = 80): string {
  const clean = text.replace(/[^\p{L}\p{N}\p{P}\p{S} ]/gu, '·');
  return clean.length <= most ? clean : `${clean.slice(0, most)}…`;
}
