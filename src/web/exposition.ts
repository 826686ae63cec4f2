/**
 * The two text forms of metrics: OpenMetrics 1.0 (prometheus/OpenMetrics, specification/OpenMetrics.md) and the
 * Prometheus text format 0.0.4, which knows neither units, state sets nor an end mark.
 */

export type MetricType = 'gauge' | 'counter' | 'stateset' | 'info';

export interface Sample {
  readonly labels: Readonly<Record<string, string>>;
  readonly value: number;
}

export interface MetricFamily {
  /** Without the suffix `_total` or `_info`; ends in the unit when it has one. */
  readonly name: string;
  readonly type: MetricType;
  readonly unit: string;
  readonly help: string;
  readonly samples: readonly Sample[];
}

export const OPENMETRICS_TYPE = 'application/openmetrics-text; version=1.0.0; charset=utf-8';
export const PROMETHEUS_TYPE = 'text/plain; version=0.0.4; charset=utf-8';

/** Whether a scraper's Accept header asks for OpenMetrics. */
export function wantsOpenMetrics(accept: string | undefined): boolean {
  return (accept ?? '').includes('application/openmetrics-text');
}

const escapeHelp = (text: string): string => text.replaceAll('\\', '\\\\').replaceAll('\n', '\\n');
const escapeLabel = (text: string): string => escapeHelp(text).replaceAll('"', '\\"');

const SUFFIX: Readonly<Record<MetricType, string>> = {
  gauge: '',
  counter: '_total',
  stateset: '',
  info: '_info',
};

function sampleLine(family: MetricFamily, sample: Sample): string {
  const labels = Object.entries(sample.labels).map(([name, value]) => `${name}="${escapeLabel(value)}"`);
  const set = labels.length > 0 ? `{${labels.join(',')}}` : '';
  return `${family.name}${SUFFIX[family.type]}${set} ${sample.value}`;
}

export function openMetrics(families: readonly MetricFamily[]): string {
  const lines = families.flatMap((family) => [
    `# TYPE ${family.name} ${family.type}`,
    ...(family.unit ? [`# UNIT ${family.name} ${family.unit}`] : []),
    `# HELP ${family.name} ${escapeLabel(family.help)}`,
    ...family.samples.map((sample) => sampleLine(family, sample)),
  ]);
  return `${[...lines, '# EOF'].join('\n')}\n`;
}

export function prometheusText(families: readonly MetricFamily[]): string {
  const lines = families.flatMap((family) => {
    const name = `${family.name}${SUFFIX[family.type]}`;
    return [
      `# HELP ${name} ${escapeHelp(family.help)}`,
      `# TYPE ${name} ${family.type === 'counter' ? 'counter' : 'gauge'}`,
      ...family.samples.map((sample) => sampleLine(family, sample)),
    ];
  });
  return `${lines.join('\n')}\n`;
}
