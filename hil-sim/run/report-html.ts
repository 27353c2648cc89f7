/** The few pieces of HTML that every part of a report needs. */
import { parseHTML } from 'linkedom';
import * as Plot from '@observablehq/plot';

/** Text as it stands in an element or in a quoted attribute. */
export function html(text: string): string {
  return text.replace(/&/g, '&amp;').replace(/</g, '&lt;').replace(/>/g, '&gt;').replace(/"/g, '&quot;');
}

/** A figure that does not break at its spaces. */
export function whole(text: string): string {
  return html(text).replace(/ /g, '&nbsp;');
}

/** Ticks of metres: no thousands marks, a real minus sign. */
export function plainTick(value: number): string {
  return value < 0 ? `−${-value}` : String(value);
}

/** A fraction of a pixel finer than this cannot be seen; longer numbers only make the file large. */
const LONG_FRACTION = /(\.\d)\d+/g;

/** Draws a plot as SVG text that says in words what it shows. */
export function drawing(says: string, options: Plot.PlotOptions): string {
  const { document } = parseHTML('<html><body></body></html>');
  const drawn = Plot.plot({ ...options, document: document as never, figure: false });
  const svg = String((drawn as unknown as { outerHTML: string }).outerHTML);
  return svg
    .replace(/ (d|transform|x|y|x1|x2|y1|y2|points)="([^"]*)"/g, (_all, name: string, value: string) =>
      ` ${name}="${value.replace(LONG_FRACTION, '$1')}"`)
    .replace(/<svg /, `<svg role="img" aria-label="${html(says)}" `);
}

/** A figure: heading, drawing, and the numbers in words. */
export function figureOf(heading: string, svg: string, caption: string): string {
  return `<figure><h3>${html(heading)}</h3>${svg}<figcaption>${caption}</figcaption></figure>`;
}
