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

/**
 * Reads the error that the client library gave before it closed; null when it closed without one, as old brokers do
 * on a protocol version that they do not know.
 */
export function failureOf(error: unknown, url: string): Failure {
  const at = shownAddress(url);
  const code = (error as { code?: unknown } | null)?.code;
  if (typeof code === 'number') return refusal(code, at);
  if (typeof code === 'string' && CERTIFICATE.test(code)) {
    const words = `The broker at ${at} could not prove who it is (${code}); check broker.tls.ca-file and the name in broker.url.`;
    return { kind: 'refused', code: null, error: new RimeholdError('broker-refused', words, { code }) };
  }
  const silent = error === null || (typeof code !== 'string' && !/timeout/i.test(String(error)));
  const why =
    typeof code === 'string'
      ? (NETWORK_WORDS[code] ?? code)
      : silent
        ? 'it closed the connection'
        : 'no answer came in time';
  const words = `The broker at ${at} cannot be reached: ${why}; check broker.url and that the broker runs.`;
  return {
    kind: silent ? 'version' : 'away',
    code: null,
    error: new RimeholdError('broker-unreachable', words, { code }),
  };
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
