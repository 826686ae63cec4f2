/** How a site's broker is connected, its secrets and certificates read. */
import type { SiteConfig } from '../config.ts';
import type { EmbeddedBroker } from '../mqtt/embedded-broker.ts';
import { deviceTopic } from '../mqtt/homie.ts';
import type { BrokerOptions } from '../mqtt/link.ts';
import { readBytes, secret } from './site.ts';

export function brokerOptions(config: SiteConfig, embedded: EmbeddedBroker | null): BrokerOptions {
  const { broker, site } = config;
  const will = { topic: `${deviceTopic(config)}/$state`, payload: 'lost' };
  const clientId = broker.clientId ?? `rimehold-${site.id}`;
  if (embedded)
    return { url: embedded.url, clientId, protocol: '3.1.1', user: null, password: null, tls: null, will };
  const file = (path: string | null, key: string): Uint8Array | null =>
    path === null
      ? null
      : readBytes(path, 'a certificate or its key', `mend broker.tls.${key} in the site file`);
  return {
    url: broker.url,
    clientId,
    protocol: broker.protocol,
    user: broker.user,
    password: secret(
      'the password of the broker',
      'broker.password',
      broker.passwordFile,
      broker.passwordEnv,
    ),
    tls:
      broker.tls === null
        ? null
        : {
            ca: file(broker.tls.caFile, 'ca-file'),
            cert: file(broker.tls.certFile, 'cert-file'),
            key: file(broker.tls.keyFile, 'key-file'),
          },
    will,
  };
}
