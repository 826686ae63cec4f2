/**
 * Server-sent events (HTML standard, section 9.2): `record`, `plan`, `night`. Each reader first gets the newest record
 * and plan, so a reconnect misses nothing that matters. A reader that cannot keep up gets the newest of each kind,
 * never a growing queue.
 */
import type { WebEvent, WebSource } from './source.ts';

export const KEEP_ALIVE_MS = 15_000;
const RETRY_MS = 3000;
/** Each stream holds a socket; a small board serves a household, not a crowd. */
const MOST_STREAMS = 64;

export interface EventStreams {
  /** A new stream, or null when there are too many. */
  open(): Response | null;
  closeAll(): void;
  readonly count: number;
}

export function createEventStreams(source: WebSource, keepAliveMs: number = KEEP_ALIVE_MS): EventStreams {
  const open = new Set<() => void>();
  let serial = 0;
  const format = (event: WebEvent): string => {
    serial += 1;
    return `id: ${serial}\nevent: ${event.kind}\ndata: ${JSON.stringify(dataOf(event))}\n\n`;
  };
  return {
    open: () => (open.size >= MOST_STREAMS ? null : openStream(source, format, open, keepAliveMs)),
    closeAll: () => {
      for (const close of open) close();
    },
    get count() {
      return open.size;
    },
  };
}

/** What a stream has to end before it has begun. */
const nothing = (): void => {};

function dataOf(event: WebEvent): unknown {
  if (event.kind === 'record') return event.record;
  return event.kind === 'plan' ? event.plan : { date: event.date };
}

function openStream(
  source: WebSource,
  format: (event: WebEvent) => string,
  open: Set<() => void>,
  keepAliveMs: number,
): Response {
  const text = new TextEncoder();
  const waiting = new Map<WebEvent['kind'], WebEvent>();
  let finish = nothing;
  const body = new ReadableStream<Uint8Array>(
    {
      start(controller) {
        const write = (chunk: string): void => controller.enqueue(text.encode(chunk));
        write(`retry: ${RETRY_MS}\n\n`);
        const { record, plan } = source.now();
        if (plan) write(format({ kind: 'plan', plan }));
        if (record) write(format({ kind: 'record', record }));
        const unsubscribe = source.subscribe((event) => {
          if ((controller.desiredSize ?? 0) > 0) write(format(event));
          else waiting.set(event.kind, event);
        });
        const timer = setInterval(() => {
          if ((controller.desiredSize ?? 0) > 0) write(': still here\n\n');
        }, keepAliveMs);
        const close = (): void => {
          finish();
          controller.close();
        };
        finish = () => {
          clearInterval(timer);
          unsubscribe();
          open.delete(close);
        };
        open.add(close);
      },
      pull(controller) {
        for (const event of waiting.values()) controller.enqueue(text.encode(format(event)));
        waiting.clear();
      },
      cancel: () => finish(),
    },
    { highWaterMark: 8 },
  );
  const headers = {
    'content-type': 'text/event-stream; charset=utf-8',
    'cache-control': 'no-store',
    'x-accel-buffering': 'no',
  };
  return new Response(body, { headers });
}
