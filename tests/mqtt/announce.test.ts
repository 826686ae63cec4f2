import { describe, expect, test } from 'vitest';
import { announcements, PLACEHOLDERS, templateFaults } from '../../src/mqtt/announce.ts';
import { propertiesOf } from '../../src/mqtt/homie.ts';
import { siteConfig } from './site.ts';

function site(topic: string, payload: string) {
  const template = `{topic: ${JSON.stringify(topic)}, payload: ${JSON.stringify(payload)}}`;
  return siteConfig(`announce: {templates: [${template}]}`);
}

const TOPIC = 'hub/{{site-id}}/{{node}}/{{property}}';

describe('announcements in the owner’s own words', () => {
  test('one retained message for each property', () => {
    const config = site(TOPIC, '{"label":"{{site-name}}: {{name}}","from":"{{topic}}","unit":"{{unit}}"}');
    const made = announcements(config);
    expect(made).toHaveLength(propertiesOf(config).size);
    expect(made[0]).toEqual({
      topic: 'hub/juniper/bank/ice-on-hand',
      payload: '{"label":"Juniper hut: Ice on hand","from":"homie/5/juniper/bank/ice-on-hand","unit":"kWh"}',
      qos: 1,
      retain: true,
    });
  });

  test('whole values stand without quotes', () => {
    const config = site(
      TOPIC,
      '{"settable":{{settable}},"choices":{{choices}},"range":[{{least}},{{most}},{{step}}],"set":"{{set-topic}}"}',
    );
    const of = (path: string): unknown =>
      JSON.parse(String(announcements(config).find(({ topic }) => topic.endsWith(path))?.payload));
    expect(of('/comfort/limit')).toEqual({
      settable: true,
      choices: [],
      range: [18, 32, 0.1],
      set: 'homie/5/juniper/comfort/limit/set',
    });
    expect(of('/bank/phase')).toMatchObject({
      settable: false,
      choices: ['all-water', 'mixed', 'full'],
      range: [null, null, null],
    });
  });

  test('texts are escaped inside JSON, and not in topics', () => {
    const config = site(TOPIC, '{"site":"{{site-name}}"}');
    const quoted = { ...config, site: { ...config.site, name: 'The "Juniper" hut' } };
    expect(JSON.parse(String(announcements(quoted)[0].payload))).toEqual({ site: 'The "Juniper" hut' });
  });

  test('spaces in the braces do not matter', () => {
    expect(announcements(site('{{ node }}/{{property}}', '{{ unit }}'))[0]).toMatchObject({
      topic: 'bank/ice-on-hand',
      payload: 'kWh',
    });
  });

  test('every placeholder can be rendered', () => {
    const payload = PLACEHOLDERS.map((name) => `{{${name}}}`).join(' ');
    for (const made of announcements(site(TOPIC, payload)))
      expect(made.payload).not.toMatch(/\{\{|undefined/);
  });

  test.each([
    ['an unknown placeholder', TOPIC, '{{colour}}', /templates\.0\.payload: .*found "\{\{colour\}\}"/],
    [
      'an unknown placeholder in the topic',
      '{{planet}}/{{property}}',
      'x',
      /templates\.0\.topic: .*found "\{\{planet\}\}"/,
    ],
    ['a whole value in a topic', '{{choices}}/{{property}}', 'x', /templates\.0\.topic/],
    ['a wildcard in the topic', 'a/+/{{property}}', 'x', /without \+ or #/],
    ['one topic for all', 'hub/juniper', 'x', /a topic of its own for each property/],
    ['broken JSON', TOPIC, '{"a":{{name}}}', /expected JSON/],
    ['inherited names', TOPIC, '{{constructor}}', /found "\{\{constructor\}\}"/],
  ])('%s is one fault of the site file', (_what, topic, payload, sentence) => {
    const config = site(topic, payload);
    expect(templateFaults(config)).toEqual([expect.stringMatching(sentence)]);
    expect(() => announcements(config)).toThrow(expect.objectContaining({ code: 'config' }));
  });
});
