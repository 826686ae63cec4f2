/** Errors on the programming interface: RFC 9457 problem details. */
import type { ContentfulStatusCode } from 'hono/utils/http-status';

/** A fault in what was sent, by JSON pointer into it, after the example in RFC 9457 section 3. */
export interface ProblemFault {
  readonly detail: string;
  readonly pointer: string;
}

export interface ProblemExtras {
  readonly errors?: readonly ProblemFault[];
  readonly headers?: Readonly<Record<string, string>>;
}

const TITLES: Readonly<Partial<Record<ContentfulStatusCode, string>>> = {
  400: 'Bad request',
  401: 'Passphrase needed',
  403: 'Not allowed',
  404: 'Not found',
  405: 'Method not allowed',
  409: 'Not possible now',
  413: 'Too large',
  415: 'Wrong kind of content',
  421: 'Unknown name of this machine',
  422: 'Not understood',
  429: 'Too many attempts',
  500: 'Internal fault',
  503: 'Not available',
};

export function problem(status: ContentfulStatusCode, detail: string, extras: ProblemExtras = {}): Response {
  const body = {
    type: 'about:blank',
    title: TITLES[status] ?? 'Problem',
    status,
    detail,
    ...(extras.errors ? { errors: extras.errors } : {}),
  };
  const headers = {
    'content-type': 'application/problem+json',
    'cache-control': 'no-store',
    ...extras.headers,
  };
  return new Response(JSON.stringify(body), { status, headers });
}
