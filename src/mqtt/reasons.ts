/** What brokers answer, in sentences for people. Codes: MQTT 3.1.1 section 3.2.2.3, MQTT 5 section 2.4. */

/** CONNACK return codes of MQTT 3.1.1. */
const RETURN_CODES: Readonly<Record<number, string>> = {
  1: 'it does not speak this MQTT version',
  2: 'it does not accept the client identifier',
  3: 'it is not available',
  4: 'user name or password is wrong',
  5: 'the user is not authorized',
};

/** Reason codes of MQTT 5, failures only. */
const REASON_CODES: Readonly<Record<number, string>> = {
  0x80: 'it gave no reason',
  0x81: 'it found a malformed packet',
  0x82: 'it found a protocol error',
  0x83: 'of a reason of its own',
  0x84: 'it does not speak this MQTT version',
  0x85: 'it does not accept the client identifier',
  0x86: 'user name or password is wrong',
  0x87: 'the user is not authorized',
  0x88: 'it is not available',
  0x89: 'it is busy',
  0x8a: 'this client is banned',
  0x8b: 'it is shutting down',
  0x8c: 'it does not accept the authentication method',
  0x8d: 'it heard nothing from us in the keep-alive time',
  0x8e: 'another client took over the session with the same client identifier',
  0x8f: 'it does not accept the topic filter',
  0x90: 'it does not accept the topic name',
  0x93: 'more messages were in flight than it allows',
  0x94: 'it found an invalid topic alias',
  0x95: 'a packet was larger than it allows',
  0x96: 'messages came faster than it allows',
  0x97: 'a quota is used up',
  0x98: 'its administrator closed the connection',
  0x99: 'a payload was not of the format it said',
  0x9a: 'it does not keep retained messages',
  0x9b: 'it does not offer this quality of service',
  0x9c: 'it asks to use another server',
  0x9d: 'it has moved to another server',
  0x9e: 'it does not offer shared subscriptions',
  0x9f: 'connections come faster than it allows',
  0xa0: 'the longest connection time is over',
  0xa1: 'it does not offer subscription identifiers',
  0xa2: 'it does not offer wildcard subscriptions',
};

/** "…, because <words>": codes below 0x80 are of MQTT 3.1.1, those from 0x80 of MQTT 5. */
export function reasonWords(code: number): string {
  return RETURN_CODES[code] ?? REASON_CODES[code] ?? `of reason code 0x${code.toString(16).padStart(2, '0')}`;
}

export const SESSION_TAKEN_OVER = 0x8e;

export const isVersionRefusal = (code: number): boolean => code === 1 || code === 0x84;
/** Refusals that no waiting cures: only a person can. */
export const isCredentialRefusal = (code: number): boolean =>
  [2, 4, 5, 0x85, 0x86, 0x87, 0x8a, 0x8c].includes(code);
export const isRetainRefusal = (code: number): boolean => code === 0x9a;
export const isQosRefusal = (code: number): boolean => code === 0x9b;
