/** The limits as a ruled list: what was measured, what is allowed, and the margin as a bar. */
import { figure, marginFigure } from './figures.ts';
import { html, whole } from './report-html.ts';
import { isLeast, marginShare } from './limits.ts';
import { MEASURES, type MeasureName } from './measures.ts';
import { bound, worstWords, type Outcome } from './outcome.ts';

type Limit = Outcome['limits'][number];

/** What each limit is about, in words; those not here are named as their measure. */
const MEASURE_OF: Readonly<Record<string, MeasureName>> = {
  formUpWithin: 'formUp_s',
  deliveryRatioMin: 'deliveryRatio',
  energy: 'energy_Wh',
};

export function limitsSection(outcome: Outcome): string {
  if (outcome.limits.length === 0)
    return '<h2>Limits</h2><p>The trial sets no limits; nothing was judged.</p>';
  return (
    '<h2>Limits</h2>' +
    '<p class="says">Bars show the margin as a share of the limit, ±100&nbsp;% at most: ' +
    'to the right of the line is room, ' +
    'hatched to the left is what is lacking.</p>' +
    `<ol class="limits">${outcome.limits.map(row).join('')}</ol>`
  );
}

function row(limit: Limit): string {
  const measure = MEASURE_OF[limit.name] ?? (limit.name as MeasureName);
  const where = worstWords(limit.worst);
  const worst = isLeast(limit.name) ? 'least' : 'worst';
  return (
    `<li class="limit ${limit.met ? 'met' : 'unmet'}">` +
    `<span class="name"><b>${html(limit.name)}</b><br>` +
    `<span class="says">${html(MEASURES[measure].says)}</span></span>` +
    `<span class="value">${whole(figure(limit.value, limit.unit))}</span>` +
    `<span class="allowed">${bound(limit)} ${whole(figure(limit.limit, limit.unit))}</span>` +
    bar(limit) +
    `<span class="margin">${whole(marginFigure(limit.margin, limit.unit))}</span>` +
    `<span class="word">${limit.met ? 'met' : 'not met'}` +
    `${where === '' ? '' : `<br><span class="says">${worst}: ${html(where)}</span>`}</span></li>`
  );
}

const HALF = 100;

/** Room to the right of the line, filled; what is lacking to the left, hatched; arrows say there is more. */
function bar(limit: Limit): string {
  const share = marginShare(limit);
  const length = Math.round(HALF * Math.min(1, Math.abs(share)));
  return (
    `<svg class="bar" viewBox="${-HALF} 0 ${2 * HALF} 18" preserveAspectRatio="none" aria-hidden="true">` +
    `<path d="M${-HALF},9H${HALF}" stroke="var(--rule)"/>` +
    (share >= 0 ? room(length, share > 1) : lack(length, `bar-${limit.name}`)) +
    '<path d="M0,0V18" stroke="var(--ink)" stroke-width="2"/></svg>'
  );
}

function room(length: number, isMore: boolean): string {
  const arrows = `M${HALF - 9},5l4,4l-4,4m5,-8l4,4l-4,4`;
  return (
    `<rect x="0" y="3" width="${length}" height="12" fill="var(--room)"/>` +
    (isMore ? `<path d="${arrows}" fill="none" stroke="var(--paper)" stroke-width="1.5"/>` : '')
  );
}

function lack(length: number, clip: string): string {
  const box = `x="${-length}" y="3" width="${length}" height="12"`;
  const hatch = Array.from({ length: Math.ceil(length / 7) }, (_, line) => `M${-7 * line},0l-9,18`).join('');
  return (
    `<rect ${box} fill="none" stroke="var(--lack)" stroke-width="1.5"/>` +
    `<clipPath id="${clip}"><rect ${box}/></clipPath>` +
    `<path d="${hatch}" stroke="var(--lack)" stroke-width="2" clip-path="url(#${clip})"/>`
  );
}
