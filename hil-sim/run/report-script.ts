/** Faults and orders in the report: hatched spans with their words on every plot over time, and a table. */
import * as Plot from '@observablehq/plot';
import { clock } from './figures.ts';
import { html } from './report-html.ts';
import type { ReportInput } from './report-input.ts';
import { scriptLines } from './script-words.ts';

/** The hatching, once a page; every plot refers to it. */
export const HATCH =
  '<svg width="0" height="0" aria-hidden="true" style="position:absolute"><defs>' +
  '<pattern id="hatch" width="6" height="6" patternUnits="userSpaceOnUse" patternTransform="rotate(45)">' +
  '<path d="M0 0V6" stroke="var(--ink)" stroke-width="1.2" stroke-opacity="0.35"/></pattern></defs></svg>';

/** Spans and moments of the script; they go under the lines. */
export function scriptSpans({ trial, report }: ReportInput): Plot.Markish[] {
  const lines = scriptLines(trial);
  const hours = (timeS: number): number => Math.min(timeS, report.lastS) / 3600;
  const spans = lines
    .filter(({ fromS, untilS }) => untilS > fromS)
    .map(({ fromS, untilS }) => ({ x1: hours(fromS), x2: hours(untilS) }));
  const orders = lines.filter(({ fromS, untilS }) => untilS === fromS).map(({ fromS }) => hours(fromS));
  return [
    Plot.rectX(spans, { x1: 'x1', x2: 'x2', fill: 'url(#hatch)' }),
    Plot.ruleX(orders, { stroke: 'var(--ink)', strokeDasharray: '5 3' }),
  ];
}

/** Words of the script; they go over the lines, those of neighbours on lines of their own. */
export function scriptWords({ trial, report }: ReportInput): Plot.Markish[] {
  const hours = (timeS: number): number => Math.min(timeS, report.lastS) / 3600;
  return scriptLines(trial).map((line, index) =>
    Plot.text([hours(line.fromS)], {
      x: (h: number) => h,
      frameAnchor: 'top',
      textAnchor: hours(line.fromS) > report.lastS / 5400 ? 'end' : 'start',
      dx: 3,
      dy: 16 + 13 * (index % 4),
      fontSize: 10,
      fill: 'var(--ink)',
      stroke: 'var(--paper)',
      strokeWidth: 3,
      text: () => line.short,
    }),
  );
}

/** The script as a table; empty if the trial has none. */
export function scriptTable({ trial }: ReportInput): string {
  const lines = scriptLines(trial);
  if (lines.length === 0) return '';
  const row = (line: (typeof lines)[number]): string => {
    const until = line.untilS === line.fromS ? '' : line.untilS === Infinity ? 'the end' : clock(line.untilS);
    return `<tr><td>${clock(line.fromS)}</td><td>${until}</td><td>${html(line.words)}</td></tr>`;
  };
  const head = '<thead><tr><th>from</th><th>until</th><th>what</th></tr></thead>';
  return `<h2>Script</h2><table>${head}<tbody>${lines.map(row).join('')}</tbody></table>`;
}
