/** JSON Pointer, RFC 6901: syntax (section 3) and evaluation (section 4). */

const SYNTAX = /^(\/([^~/]|~[01])*)*$/u;
const ARRAY_INDEX = /^(0|[1-9]\d*)$/;

export function isPointer(text: string): boolean {
  return SYNTAX.test(text);
}

/** Decodes one reference token; `~1` before `~0`, so that `~01` becomes `~1`. */
function decodeToken(token: string): string {
  return token.replaceAll('~1', '/').replaceAll('~0', '~');
}

export type Pointed = { readonly found: true; readonly value: unknown } | { readonly found: false };

const NOT_FOUND: Pointed = { found: false };

/** The value that a pointer names in a parsed JSON document. Own members only: the prototype is never walked. */
export function pointAt(document: unknown, pointer: string): Pointed {
  if (!isPointer(pointer)) return NOT_FOUND;
  let value = document;
  for (const token of pointer.split('/').slice(1).map(decodeToken)) {
    if (typeof value !== 'object' || value === null) return NOT_FOUND;
    if (Array.isArray(value) && !ARRAY_INDEX.test(token)) return NOT_FOUND;
    if (!Object.hasOwn(value, token)) return NOT_FOUND;
    value = (value as Record<string, unknown>)[token];
  }
  return { found: true, value };
}
