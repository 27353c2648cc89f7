/** Figures as people read them: a value with its unit, a time of the run, a margin with its sign. */

const NONE = '–';

/** Digits after the point, so that about three figures stand. */
function fixed(value: number): string {
  const size = Math.abs(value);
  const text = value.toFixed(size >= 100 ? 0 : size >= 10 ? 1 : 2);
  return Number(text) === 0 ? text.replace('-', '') : text;
}

/** A value of a measure with its unit; shares are written in percent, times in minutes. */
export function figure(value: number | null, unit: string): string {
  if (value === null || !Number.isFinite(value)) return NONE;
  switch (unit) {
    case '': return `${fixed(100 * value)} %`;
    case 's': return span(value);
    case 'm/s': return `${value.toFixed(3)} m/s`;
    case 'm': return `${fixed(value)} m`;
    case 'Wh': return `${fixed(value)} Wh`;
    default: return `${Math.round(value)} ${unit}`;
  }
}

/** A margin: what is left (+) or lacking (−), with a real minus sign. */
export function marginFigure(margin: number | null, unit: string): string {
  if (margin === null) return NONE;
  return `${margin < 0 ? '−' : '+'}${figure(Math.abs(margin), unit)}`;
}

/** A length of time: `41 min`, `41 min 30 s`, `1 h`, `1 h 05 min`. */
export function span(seconds: number): string {
  const whole = Math.round(Math.abs(seconds));
  const h = Math.floor(whole / 3600);
  const min = Math.floor((whole % 3600) / 60);
  const s = whole % 60;
  const two = (value: number): string => String(value).padStart(2, '0');
  const rest = s === 0 ? '' : ` ${two(s)} s`;
  if (h > 0) return min === 0 && s === 0 ? `${h} h` : `${h} h ${two(min)} min${rest}`;
  return min > 0 ? `${min} min${rest}` : `${s} s`;
}

/** A moment of the run since its start, `2:31:00`. */
export function clock(seconds: number | null): string {
  if (seconds === null) return NONE;
  const whole = Math.floor(seconds + 1e-6);
  const two = (value: number): string => String(value).padStart(2, '0');
  return `${Math.floor(whole / 3600)}:${two(Math.floor((whole % 3600) / 60))}:${two(whole % 60)}`;
}
