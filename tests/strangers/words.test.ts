/** What a stranger types wrong: one sentence, exit status 2, and nothing made or touched. */
import { closeSync, existsSync, openSync, readdirSync } from 'node:fs';
import { describe, expect, it, onTestFinished } from 'vitest';
import {
  expectNarrow,
  expectNoInsides,
  expectRefusal,
  ownFolder,
  rimehold,
  rimeholdAs,
  writeSite,
} from './stranger.ts';

describe('help', () => {
  it('of every verb that is listed ends with 0, says what the verb takes, in 80 columns', async () => {
    const folder = ownFolder();
    const list = await rimehold(folder, '--help');
    expect(list).toMatchObject({ status: 0, err: '' });
    expectNarrow(list.out);
    const verbs = [...list.out.matchAll(/^ {2}([a-z]+) .*\[options\]/gm)].map((match) => match[1]);
    for (const verb of ['run', 'demo', 'check', 'import', 'estimate', 'night', 'nights', 'backup'])
      expect(verbs).toContain(verb);
    const helps = await Promise.all(verbs.map((verb) => rimehold(folder, verb, '--help')));
    for (const [index, help] of helps.entries()) {
      expect(help, verbs[index]).toMatchObject({ status: 0, err: '' });
      expect(help.out).toContain(`rimehold ${verbs[index]}`);
      expectNarrow(help.out);
    }
    expect(readdirSync(folder)).toEqual([]);
  });

  it('comes by itself, with status 2, when no verb is named', async () => {
    const ended = await rimehold(ownFolder());
    expect(ended).toMatchObject({ status: 2, out: '' });
    expect(ended.err).toContain('Usage: rimehold');
    expectNoInsides(ended.err);
  });
});

describe('standard output', () => {
  it('that is full is told in a sentence (3)', async () => {
    if (!existsSync('/dev/full')) return console.warn('SKIPPED: there is no /dev/full on this system.');
    const full = openSync('/dev/full', 'w');
    onTestFinished(() => closeSync(full));
    const ended = await rimeholdAs({ out: full }, ownFolder(), 'reference');
    expectRefusal(ended, 3, 'standard output', 'full', 'elsewhere');
  });

  it('that nobody reads any more is no fault', async () => {
    expect(await rimeholdAs({ out: 'unread' }, ownFolder(), 'reference')).toMatchObject({
      status: 0,
      err: '',
    });
  });
});

describe('wrong words', () => {
  it.each([
    ['an unknown verb', ['nigth'], ['nigth', 'night', 'backup', '--help']],
    ['an unknown option', ['run', '--konfig', 'x'], ['--konfig', '--config', 'rimehold run --help']],
    ['a word too many', ['run', 'now'], ['rimehold run', '--help']],
    ['a missing argument', ['import'], ['file', 'rimehold import --help']],
    ['a missing option', ['estimate', '--out', 'a.csv'], ['--readings', 'rimehold estimate --help']],
    [
      'a seed that is none',
      ['demo', '--seed', 'lucky'],
      ['--seed', 'lucky', 'whole number', 'rimehold demo --help'],
    ],
    ['an option without its value', ['run', '--lapse'], ['--lapse', 'rimehold run --help']],
  ])('%s', async (_name, args, facts) => {
    const folder = ownFolder();
    expectRefusal(await rimehold(folder, ...args), 2, ...facts);
    expect(readdirSync(folder)).toEqual([]);
  });

  it.each([
    [
      ['run', '--lapse', 'fast'],
      ['--lapse', 'fast', '100000'],
    ],
    [
      ['run', '--lapse', '0'],
      ['--lapse', '"0"'],
    ],
    [
      ['run', '--epoch', '2026-07-14'],
      ['--epoch', '"2026-07-14"', '2026-07-14T12:00:00Z'],
    ],
    [
      ['check', '--listen', '2s'],
      ['--listen', '"2s"', 'PT30S'],
    ],
    [
      ['nights', '--from', '2026-7-01'],
      ['--from', '"2026-7-01"', 'YYYY-MM-DD'],
    ],
    [
      ['nights', '--to', '2026-02-30'],
      ['--to', '"2026-02-30"', 'YYYY-MM-DD'],
    ],
  ])('%j', async (args, facts) => {
    const folder = ownFolder();
    writeSite(folder);
    expectRefusal(await rimehold(folder, ...args), 2, ...facts);
    expect(readdirSync(folder)).toEqual(['site.yaml']);
  });
});
