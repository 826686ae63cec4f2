/** Why a connection to the broker did not come about, as one error for a person and one word for the program. */
import { RimeholdError } from '../errors.ts';
import { isCredentialRefusal, isVersionRefusal, reasonWords } from './reasons.ts';

export interface Failure {
  /** `version`: another MQTT version may work. `away`: waiting may help. `refused`: only a person can. */
  readonly kind: 'version' | 'away' | 'refused';
  readonly code: number | null;
  readonly error: RimeholdError;
}

const NETWORK_WORDS: Readonly<Record<string, string>> = {
  ECONNREFUSED: 'nothing listens there',
  ENOTFOUND: 'its name is not known',
  EAI_AGAIN: 'its name could not be looked up',
  EHOSTUNREACH: 'there is no way to that host',
  ENETUNREACH: 'there is no way to that network',
  ETIMEDOUT: 'no answer came in time',
  ECONNRESET: 'the connection was reset',
  EPIPE: 'the connection was closed',
};

const CERTIFICATE = /^(ERR_TLS_|CERT_|DEPTH_ZERO_|SELF_SIGNED_|UNABLE_TO_|ERR_SSL_|ERR_OSSL_|EPROTO)/;

/** The address without user and password. */
export function shownAddress(url: string): string {
  const { protocol, host } = new URL(url);
  return `${protocol}//${host}`;
}

/** A broker that does not know a protocol version may close or reset the connection without an answer. */
const SILENT = new Set([null, 'ECONNRESET', 'EPIPE']);

/** Reads the error that the client library gave before the connection closed; null when it gave none. */
export function failureOf(error: unknown, url: string): Failure {
  const at = shownAddress(url);
  const code = codeOf(error);
  if (typeof code === 'number') return refusal(code, at);
  if (code !== null && CERTIFICATE.test(code)) {
    const words = `The broker at ${at} could not prove who it is (${code}); check broker.tls.ca-file and the name in broker.url.`;
    return { kind: 'refused', code: null, error: new RimeholdError('broker-refused', words, { code }) };
  }
  const why = code === null ? 'it closed the connection' : (NETWORK_WORDS[code] ?? code);
  const words = `The broker at ${at} cannot be reached: ${why}; check broker.url and that the broker runs.`;
  return {
    kind: SILENT.has(code) ? 'version' : 'away',
    code: null,
    error: new RimeholdError('broker-unreachable', words, { code }),
  };
}

function codeOf(error: unknown): number | string | null {
  if (typeof error !== 'object' || error === null) return null;
  if ('code' in error && (typeof error.code === 'number' || typeof error.code === 'string'))
    return error.code;
  // the library's own "connack timeout" carries no code
  return error instanceof Error && /timeout/i.test(error.message) ? 'ETIMEDOUT' : null;
}

function refusal(code: number, at: string): Failure {
  const words = reasonWords(code);
  if (isCredentialRefusal(code)) {
    const sentence = `The broker at ${at} refused the connection: ${words}; check broker.user, broker.password-file and the broker's access list.`;
    return { kind: 'refused', code, error: new RimeholdError('broker-refused', sentence, { code }) };
  }
  const sentence = `The broker at ${at} refused the connection: ${words}.`;
  const kind = isVersionRefusal(code) ? 'version' : 'away';
  return { kind, code, error: new RimeholdError('broker-refused', sentence, { code }) };
}
