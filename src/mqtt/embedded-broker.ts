/**
 * A small broker inside rimehold, for a demo or a site without one: MQTT 3.1.1, no password, loopback unless told
 * otherwise, nothing kept over a restart.
 */
import { createServer, type AddressInfo, type Server } from 'node:net';
import { Aedes } from 'aedes';
import { RimeholdError } from '../errors.ts';

export interface EmbeddedBroker {
  readonly port: number;
  readonly url: string;
  /** Ends all connections and the broker. */
  stop(): Promise<void>;
}

/** Starts it; port 0 takes any free one. Rejects with `port-in-use` or `broker-unreachable`. */
export async function startEmbeddedBroker(where: { host: string; port: number }): Promise<EmbeddedBroker> {
  const broker = await Aedes.createBroker();
  // small packets go out at once: a command must not wait for the next one
  const server = createServer({ noDelay: true }, (socket) => broker.handle(socket));
  try {
    await listen(server, where);
  } catch (error) {
    await closed((done) => broker.close(done));
    throw error;
  }
  const { port } = server.address() as AddressInfo;
  const host = where.host.includes(':') ? `[${where.host}]` : where.host;
  return {
    port,
    url: `mqtt://${host === '0.0.0.0' ? '127.0.0.1' : host === '[::]' ? '[::1]' : host}:${port}`,
    stop: async () => {
      const ended = closed((done) => server.close(done));
      await closed((done) => broker.close(done));
      await ended;
    },
  };
}

function listen(server: Server, where: { host: string; port: number }): Promise<void> {
  return new Promise((resolve, reject) => {
    server.once('error', (error: NodeJS.ErrnoException) => reject(listenFault(error, where)));
    server.listen(where.port, where.host, () => resolve());
  });
}

function listenFault(error: NodeJS.ErrnoException, where: { host: string; port: number }): RimeholdError {
  const at = `${where.host}:${where.port}`;
  return error.code === 'EADDRINUSE'
    ? new RimeholdError(
        'port-in-use',
        `The embedded broker cannot listen on ${at}: the port is in use; set broker.listen-port to another one, or stop what uses it.`,
        where,
      )
    : new RimeholdError(
        'broker-unreachable',
        `The embedded broker cannot listen on ${at} (${error.code ?? error.message}); check broker.listen-host and broker.listen-port.`,
        where,
      );
}

function closed(close: (done: () => void) => void): Promise<void> {
  return new Promise((resolve) => close(resolve));
}
