import type { Answer, Finding } from '../base/answer.ts';

/** Numbers and answers in plain words, the same in the report and on the command line. */

/** Three significant digits, thousands separated, no exponent between 1e-4 and 1e6. */
export function number(value: number, digits = 3): string {
  if (value === 0) return '0';
  const size = Math.abs(value);
  if (size >= 1e6 || size < 1e-4) return value.toExponential(digits - 1).replace('e+', 'e');
  const rounded = Number(value.toPrecision(digits));
  const decimals = Math.max(0, digits - 1 - Math.floor(Math.log10(Math.abs(rounded))));
  const text = rounded.toFixed(Math.min(decimals, 12));
  const [whole, fraction] = text.split('.');
  const grouped = whole!.replace(/\B(?=(\d{3})+$)/g, ',');
  return fraction === undefined ? grouped : `${grouped}.${fraction}`;
}

/** A count with thousands separated. */
export function count(value: number): string {
  return Math.round(value)
    .toString()
    .replace(/\B(?=(\d{3})+$)/g, ',');
}

/** Value with its unit; dimensionless values stand alone, and '1/s' reads 'per s'. */
export function quantity(value: number, unit: string): string {
  return withUnit(number(value), unit);
}

export function withUnit(text: string, unit: string): string {
  if (unit === '' || unit === '1') return text;
  return unit.startsWith('1/') ? `${text} per ${unit.slice(2)}` : `${text} ${unit}`;
}

/** `0.90` → `90 %`. */
export function percent(share: number, digits = 0): string {
  return `${(share * 100).toFixed(digits)} %`;
}

/** The value of a finding with its bound, e.g. `23.5 s`, `at least 40 s`. */
export function findingValue(answer: Finding): string {
  if (answer.bound === 'lower') return `at least ${quantity(answer.low, answer.unit)}`;
  if (answer.bound === 'upper') return `at most ${quantity(answer.high, answer.unit)}`;
  return quantity(answer.value, answer.unit);
}

/** The interval of a finding, e.g. `21 to 26 s, 90 % interval`. */
export function findingInterval(answer: Finding): string {
  const level = percent(answer.level);
  if (answer.bound === 'lower') return `lower bound at ${level}`;
  if (answer.bound === 'upper') return `upper bound at ${level}`;
  return `${number(answer.low)} to ${quantity(answer.high, answer.unit)}, ${level} interval`;
}

/** One line for an answer: value and interval, or the refusal with its code. */
export function answerLine(answer: Answer): string {
  return answer.ok
    ? `${findingValue(answer)}  (${findingInterval(answer)})`
    : `refused, ${answer.code}: ${answer.why}`;
}

const LARGER_UNITS: readonly (readonly [unit: string, seconds: number])[] = [
  ['d', 86_400],
  ['h', 3600],
  ['min', 60],
  ['s', 1],
];

/** A time in its unit; long times in seconds also read in minutes, hours or days. */
export function duration(value: number, timeUnit: string): string {
  const plain = quantity(value, timeUnit);
  if (timeUnit !== 's' || value < 120) return plain;
  const [unit, seconds] = LARGER_UNITS.find(([, size]) => value >= 2 * size)!;
  return `${plain} (${number(value / seconds, 2)} ${unit})`;
}
