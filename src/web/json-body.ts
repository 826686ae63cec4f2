/** Reading what a change brings: a short JSON body of a known shape, or a problem that says what was wrong. */
import type * as z from 'zod';
import { problem } from './problem.ts';

const MOST_BODY_BYTES = 4096;

export type Body<T> =
  { readonly ok: true; readonly value: T } | { readonly ok: false; readonly refusal: Response };

export async function jsonBody<T>(request: Request, type: z.ZodType<T>): Promise<Body<T>> {
  if (!/^application\/json\b/i.test(request.headers.get('content-type') ?? '')) {
    return refused(problem(415, 'Expected a JSON body with content type application/json.'));
  }
  const text = await shortText(request);
  if (text === null) return refused(problem(413, `Expected a body of at most ${MOST_BODY_BYTES} bytes.`));
  const value = parsed(text);
  if (value === undefined) return refused(problem(400, 'Expected a JSON body, found something else.'));
  const read = type.safeParse(value);
  return read.success ? { ok: true, value: read.data } : refused(notUnderstood(read.error));
}

const refused = (refusal: Response): Body<never> => ({ ok: false, refusal });

export function notUnderstood(error: z.ZodError): Response {
  const errors = error.issues.map((issue) => ({
    detail: issue.message,
    pointer: `#/${issue.path.join('/')}`,
  }));
  return problem(422, `Not understood: ${errors[0].detail}.`, { errors });
}

/** Null as soon as the body is longer than any change can be, whatever its header says. */
async function shortText(request: Request): Promise<string | null> {
  const chunks: Uint8Array[] = [];
  let size = 0;
  const reader = request.body?.getReader();
  for (let part = await reader?.read(); part && !part.done; part = await reader?.read()) {
    size += part.value.length;
    if (size > MOST_BODY_BYTES) return null;
    chunks.push(part.value);
  }
  return Buffer.concat(chunks).toString('utf8');
}

function parsed(text: string): unknown {
  try {
    return JSON.parse(text);
  } catch {
    return undefined;
  }
}
