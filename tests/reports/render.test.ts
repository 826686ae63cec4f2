import { execFile } from 'node:child_process';
import { existsSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { promisify } from 'node:util';
import { describe, expect, it, onTestFinished } from 'vitest';
import { csvLines, renderCsv } from '../../src/reports/render-csv.ts';
import { renderHtml } from '../../src/reports/render-html.ts';
import { renderText } from '../../src/reports/render-text.ts';
import { fullestSheet } from './full.ts';
import { juniper, toldSheet } from './juniper.ts';

const run = promisify(execFile);

describe('text', () => {
  it('looks as it was looked at', () => {
    expect(renderText(toldSheet({ lostW: { charging: 80 } }))).toMatchSnapshot();
  });

  it('shows nothing in SI on a sheet in inch-pound units, electricity apart', () => {
    const ip = renderText(toldSheet({ lostW: { charging: 300 } }, { site: juniper('IP', 'USD') }));
    const own = ip.slice(0, ip.indexOf('-- commands'));
    const rest = ip.slice(ip.indexOf('-- probes'));
    expect(own + rest).not.toMatch(/W\/K|L\/min|\d kg\b|, kg\b|\d K\b|°C/);
    expect(own.match(/[\d.]+ kWh/g)).toEqual([expect.stringMatching(/^3\.\d+ kWh$/)]);
    expect(rest).toMatch(/heat leak 4\.0\d ± 0\.19 BTU\/\(h °F\)/);
  });

  it('never exceeds 80 columns, in either units, on a plain or a bad night', () => {
    for (const sheet of [
      toldSheet(),
      toldSheet({}, { site: juniper('IP', 'JPY') }),
      fullestSheet('SI'),
      fullestSheet('IP'),
    ]) {
      const lines = renderText(sheet).split('\n');
      expect(lines.filter((line) => Array.from(line).length > 80)).toEqual([]);
      expect(lines.filter((line) => line !== line.trimEnd())).toEqual([]);
    }
  });

  it('shows inch-pound units and the digits of the currency', () => {
    const text = renderText(toldSheet({}, { site: juniper('IP', 'JPY') }));
    expect(text).toMatch(/kBTU/);
    expect(text).toMatch(/°F/);
    // 10.5 kWh are 35.8 thousand BTU (1 BTU = 1055.06 J, ISO 31-4).
    expect(text).toMatch(/on hand at the start +35\.8/);
    expect(text).toMatch(/ JPY/);
    expect(text).not.toMatch(/°C|\bkg\b/);
  });
});

/** RFC 4180, section 2, read by the letter. */
function parseCsv(text: string): string[][] {
  const rows: string[][] = [];
  let row: string[] = [];
  let cell = '';
  let quoted = false;
  for (let i = 0; i < text.length; i++) {
    const c = text[i];
    if (quoted) {
      if (c !== '"') cell += c;
      else if (text[i + 1] === '"') {
        cell += '"';
        i++;
      } else quoted = false;
    } else if (c === '"') quoted = true;
    else if (c === ',') {
      row.push(cell);
      cell = '';
    } else if (c === '\r' && text[i + 1] === '\n') {
      row.push(cell);
      rows.push(row);
      row = [];
      cell = '';
      i++;
    } else cell += c;
  }
  expect([row, cell]).toEqual([[], '']);
  return rows;
}

describe('CSV', () => {
  it('has one header, one row a night, the same count of fields', () => {
    const rows = parseCsv(renderCsv([toldSheet(), fullestSheet('IP')]));
    expect(rows).toHaveLength(3);
    expect(new Set(rows.map((row) => row.length)).size).toBe(1);
    const cell = (name: string): string => rows[1][rows[0].indexOf(name)];
    expect(cell('night')).toBe('2026-07-14');
    expect(Number(cell('made_kwh'))).toBe(toldSheet().made.kwh);
    expect(Number(cell('saved_against_no_storage'))).toBe(toldSheet().comparisons[0].savedMoney);
    expect(cell('saved_against_timetable')).toBe('');
  });

  it('quotes what must be quoted and defuses formulas in text alone', () => {
    const hostile = ['a,b', 'say "no"', 'two\r\nlines', '=1+1', '-x', -1.5, null, true];
    expect(parseCsv(csvLines([hostile]))).toEqual([
      ['a,b', 'say "no"', 'two\r\nlines', "'=1+1", "'-x", '-1.5', '', 'true'],
    ]);
  });
});

const CHROMIUM = '/usr/bin/chromium';
const tools = existsSync(CHROMIUM) && existsSync('/usr/bin/pdfinfo');
if (!tools) console.warn('NO CHROMIUM OR PDFINFO: that the sheet prints on one page is not tested here');

async function pagesOf(html: string): Promise<{ pages: number; size: string }> {
  const folder = mkdtempSync(join(tmpdir(), 'rimehold-print-'));
  onTestFinished(() => rmSync(folder, { recursive: true, force: true }));
  const [source, pdf] = [join(folder, 'sheet.html'), join(folder, 'sheet.pdf')];
  writeFileSync(source, html);
  await run(CHROMIUM, [
    '--headless',
    '--no-sandbox',
    '--disable-gpu',
    '--disable-quic',
    '--no-first-run',
    '--disable-background-networking',
    '--disable-component-update',
    '--disable-sync',
    `--user-data-dir=${join(folder, 'profile')}`,
    '--no-pdf-header-footer',
    `--print-to-pdf=${pdf}`,
    `file://${source}`,
  ]);
  const { stdout } = await run('/usr/bin/pdfinfo', [pdf]);
  return {
    pages: Number(/Pages:\s+(\d+)/.exec(stdout)?.[1]),
    size: /Page size:\s+(.*)/.exec(stdout)?.[1] ?? '',
  };
}

describe('HTML', () => {
  it('is self-contained, escapes what it is given, and has no script', () => {
    const sheet = fullestSheet('SI');
    const html = renderHtml({ ...sheet, site: { ...sheet.site, name: '<b>"Hut" & Co</b>' } });
    expect(html).not.toContain('<b>"Hut"');
    expect(html).toContain('&lt;b&gt;&quot;Hut&quot; &amp; Co&lt;/b&gt;');
    expect(html).not.toMatch(/<script|https?:|\son\w+=|NaN|undefined/);
    expect(html.length).toBeLessThan(60_000);
  });

  it.runIf(tools).each([
    ['A4', /\(A4\)/],
    ['Letter', /\(letter\)/],
  ])(
    'prints on one page of %s, as full as a night gets',
    async (paper, size) => {
      const printed = await pagesOf(renderHtml(fullestSheet('SI')).replace('size:auto', `size:${paper}`));
      expect(printed.size).toMatch(size);
      expect(printed.pages).toBe(1);
    },
    60_000,
  );
});
