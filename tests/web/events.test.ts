import { describe, expect, it } from 'vitest';
import { MINUTE_MS } from '../../src/time.ts';
import { createEventStreams } from '../../src/web/events.ts';
import { createFakeSource } from './fake-source.ts';
import { NOW_MS, planAt, recordAt } from './juniper-evening.ts';

interface Heard {
  id: string;
  event: string;
  data: unknown;
}

const field = (lines: string[], name: string): string | null =>
  lines.find((line) => line.startsWith(`${name}: `))?.slice(name.length + 2) ?? null;

/** Reads a stream by the rules of the HTML standard 9.2.6, as far as they are used here. */
function parse(text: string): { events: Heard[]; retryMs: number | null; comments: number } {
  const blocks = text.split('\n\n').map((block) => block.split('\n'));
  const events = blocks.flatMap((lines): Heard[] => {
    const data = field(lines, 'data');
    return data === null
      ? []
      : [
          {
            id: field(lines, 'id') ?? '',
            event: field(lines, 'event') ?? '',
            data: JSON.parse(data) as unknown,
          },
        ];
  });
  const retry = blocks.map((lines) => field(lines, 'retry')).find((value) => value !== null);
  return {
    events,
    retryMs: retry === undefined ? null : Number(retry),
    comments: blocks.filter((lines) => lines[0].startsWith(':')).length,
  };
}

describe('server-sent events', () => {
  it('starts with the newest plan and record, then tells records, plans and nights with ids', async () => {
    const source = createFakeSource();
    const streams = createEventStreams(source);
    const response = streams.open();
    expect(response?.headers.get('content-type')).toBe('text/event-stream; charset=utf-8');
    expect(response?.headers.get('cache-control')).toBe('no-store');
    const text = response?.text();
    source.emit({ kind: 'record', record: recordAt(NOW_MS + MINUTE_MS) });
    source.emit({ kind: 'night', date: '2026-07-14' });
    streams.closeAll();
    const { events, retryMs } = parse((await text) ?? '');
    expect(retryMs).toBe(3000);
    expect(events.map(({ event }) => event)).toEqual(['plan', 'record', 'record', 'night']);
    expect(events[0].data).toEqual(planAt(NOW_MS));
    expect(events[1].data).toEqual(source.now().record);
    expect(events[2].data).toEqual(recordAt(NOW_MS + MINUTE_MS));
    expect(events[3].data).toEqual({ date: '2026-07-14' });
    expect(new Set(events.map(({ id }) => id)).size).toBe(events.length);
  });

  it('keeps a quiet stream alive with comments', async () => {
    const streams = createEventStreams(createFakeSource(), 20);
    const text = streams.open()?.text();
    await new Promise((resolve) => setTimeout(resolve, 90));
    streams.closeAll();
    expect(parse((await text) ?? '').comments).toBeGreaterThanOrEqual(2);
  });

  it('gives a reader that falls behind the newest record, not a queue', async () => {
    const source = createFakeSource();
    const streams = createEventStreams(source);
    const response = streams.open();
    for (let i = 1; i <= 500; i += 1) {
      source.emit({ kind: 'record', record: recordAt(NOW_MS + i * MINUTE_MS) });
    }
    const reader = response?.body?.getReader();
    let text = '';
    for (let i = 0; i < 20 && !text.includes(String(NOW_MS + 500 * MINUTE_MS)); i += 1) {
      text += new TextDecoder().decode((await reader?.read())?.value);
    }
    const records = parse(text).events.filter(({ event }) => event === 'record');
    expect(records.length).toBeLessThan(20);
    expect(records.at(-1)?.data).toEqual(recordAt(NOW_MS + 500 * MINUTE_MS));
    await reader?.cancel();
    expect(source.listeners()).toBe(0);
    expect(streams.count).toBe(0);
  });

  it('turns away more readers than a household has', () => {
    const streams = createEventStreams(createFakeSource());
    const answers = Array.from({ length: 65 }, () => streams.open());
    expect(answers.filter((answer) => answer === null)).toHaveLength(1);
    streams.closeAll();
    expect(streams.count).toBe(0);
  });
});
