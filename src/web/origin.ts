/** Where a request comes from. Changes are taken from the page itself only; the page answers to local names only. */
import { isIP } from 'node:net';

/** Name ends that are never in public DNS: RFC 6762, RFC 6761, RFC 8375, and ICANN's reservation of `.internal`. */
const LOCAL_ENDINGS = ['.localhost', '.local', '.home.arpa', '.internal', '.lan'];

/** The host name in a Host header without its port; brackets of an IPv6 address are taken off. */
function hostName(hostHeader: string): string {
  const bracketed = /^\[([^\]]+)\](?::\d+)?$/.exec(hostHeader);
  return (bracketed ? bracketed[1] : hostHeader.replace(/:\d+$/, '')).toLowerCase();
}

/**
 * Whether the Host header may be this machine: an address, a bare name, a local name, or one of `ownNames`.
 * A page on the internet that points its own public name here (DNS rebinding) is turned away by this.
 */
export function isOwnHost(hostHeader: string | undefined, ownNames: readonly string[]): boolean {
  if (!hostHeader) return false;
  const name = hostName(hostHeader);
  if (isIP(name) !== 0 || !name.includes('.')) return name.length > 0;
  return LOCAL_ENDINGS.some((ending) => name.endsWith(ending)) || ownNames.includes(name);
}

export interface RequestOrigin {
  readonly origin: string | undefined;
  readonly fetchSite: string | undefined;
  readonly host: string | undefined;
}

/**
 * Whether a change comes from this page. Browsers send Origin with every POST, and Sec-Fetch-Site in a secure context;
 * a program that sends neither is let through to the passphrase only when it carries no cookie.
 */
export function isSameOrigin(from: RequestOrigin, hasCookie: boolean): boolean {
  if (from.fetchSite !== undefined && from.fetchSite !== 'same-origin') return false;
  if (from.origin === undefined) return from.fetchSite !== undefined || !hasCookie;
  return URL.canParse(from.origin) && new URL(from.origin).host === from.host;
}
