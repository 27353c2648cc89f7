/** `junit.xml`: a test case per limit, as build servers read them. */
import { figure } from './figures.ts';
import { bound, worstWords, type Outcome } from './outcome.ts';

/** Text inside an attribute or element of XML; control characters that XML forbids are left out. */
export function xmlText(text: string): string {
  return text
    .replace(/[\u0000-\u0008\u000b\u000c\u000e-\u001f]/g, '')
    .replace(/&/g, '&amp;')
    .replace(/</g, '&lt;')
    .replace(/>/g, '&gt;')
    .replace(/"/g, '&quot;');
}

export function junitXml(outcome: Outcome): string {
  const failures = outcome.limits.filter((limit) => !limit.met).length;
  const suite =
    `name="${xmlText(outcome.title)}" tests="${outcome.limits.length}" failures="${failures}" errors="0" ` +
    `time="${outcome.wall_s.toFixed(3)}"`;
  const cases = outcome.limits.map((limit) => {
    const head = `    <testcase classname="limits" name="${xmlText(limit.name)}" time="0"`;
    if (limit.met) return `${head}/>\n`;
    const where = worstWords(limit.worst);
    const message =
      `${limit.name} is ${figure(limit.value, limit.unit)}, but must be ${bound(limit)} ` +
      `${figure(limit.limit, limit.unit)}${where === '' ? '' : `; worst ${where}`}`;
    return `${head}>\n      <failure message="${xmlText(message)}"/>\n    </testcase>\n`;
  });
  const body = `  <testsuite ${suite}>\n${cases.join('')}  </testsuite>\n`;
  return `<?xml version="1.0" encoding="UTF-8"?>\n<testsuites>\n${body}</testsuites>\n`;
}
