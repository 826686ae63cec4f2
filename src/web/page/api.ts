/** Asking the daemon and telling it something. */

/** A refusal or a failure, in the daemon's own sentence. */
export class ApiProblem extends Error {
  readonly status: number;
  constructor(status: number, sentence: string) {
    super(sentence);
    this.status = status;
  }
}

async function problemOf(answer: Response): Promise<ApiProblem> {
  const body: unknown = await answer.json().catch(() => null);
  const detail =
    body !== null && typeof body === 'object' && 'detail' in body ? String(body.detail) : answer.statusText;
  return new ApiProblem(answer.status, detail);
}

/** Reads JSON; the daemon's own page trusts the daemon's own shapes. Throws `ApiProblem`. */
export async function read<T>(path: string): Promise<T> {
  const answer = await fetch(path, { headers: { accept: 'application/json' } });
  if (!answer.ok) throw await problemOf(answer);
  const value: unknown = await answer.json();
  // oxlint-disable-next-line typescript/no-unsafe-type-assertion -- both ends are built from src/web/source.ts
  return value as T;
}

/** Sends a change. Throws `ApiProblem`. */
export async function change(
  path: string,
  body: object | null,
  method: 'POST' | 'DELETE' = 'POST',
): Promise<void> {
  const answer = await fetch(path, {
    method,
    headers: { 'content-type': 'application/json' },
    body: body === null ? null : JSON.stringify(body),
  });
  if (!answer.ok) throw await problemOf(answer);
}
