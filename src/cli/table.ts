import type { Assessment } from '../assess/types.ts';
import type { Answer } from '../base/answer.ts';
import type { ModelSpectrum } from '../model/types.ts';
import {
  count,
  duration,
  findingInterval,
  findingValue,
  number,
  percent,
  quantity,
} from '../report/format.ts';
import { headline, LIMIT_WORDS, REGIME_WORDS } from '../report/words.ts';
import { wrap } from './terminal.ts';

const LABEL = 24;

/** The table a person reads on a terminal. */
export function assessmentTable(assessment: Assessment, width: number): string {
  const { record, regime, leadTime, exponents, dimension, noise, reconstruction } = assessment;
  const line = (label: string, text: string) =>
    `  ${label.padEnd(LABEL)}${wrap(text, Math.max(40, width - LABEL - 2), '').replace(/\n/g, `\n${' '.repeat(LABEL + 2)}`)}`;
  const answer = (label: string, value: Answer) => line(label, answerText(value));
  const lines = [
    record.name || 'Record',
    `${count(record.count)} samples, ${quantity(record.interval, record.timeUnit)} apart: ${duration(record.count * record.interval, record.timeUnit)}; standard deviation ${quantity(record.std, record.unit)}.`,
    '',
    wrap(headline(assessment), width, ''),
    '',
    line('Regime', `${REGIME_WORDS[regime.call]}, confidence ${percent(regime.confidence)}`),
    answer('Lead time', leadTime.trusted),
    answer('Lead time, from now', leadTime.now),
    answer('Median lead time', leadTime.median),
    line('Limited by', `${LIMIT_WORDS[leadTime.limitedBy]}. ${leadTime.limitedByText}`),
    answer('Per digit of sensor', leadTime.perDecimalDigit),
    line('Forecast by', leadTime.predictor),
    '',
    answer('Largest exponent', exponents.largest),
    answer('Dimension', dimension.correlation),
    answer('Entropy', dimension.entropy),
    answer('Noise (std)', noise.level),
    line(
      'State space',
      'ok' in reconstruction
        ? `refused, ${reconstruction.code}`
        : `${reconstruction.embeddingDimension} coordinates, delay ${quantity(reconstruction.delay.time, record.timeUnit)}, decorrelation window ${quantity(reconstruction.theilerWindow.time, record.timeUnit)}`,
    ),
    '',
    'Why',
    ...regime.reasons.map((reason) => `  · ${wrap(reason.text, width - 4, '    ')}`),
    '',
    'Cautions',
    ...assessment.cautions.map((caution) => `  · ${wrap(caution.text, width - 4, '    ')}`),
    '',
  ];
  return lines.join('\n');
}

function answerText(answer: Answer): string {
  if (answer.ok) return `${findingValue(answer)}  (${findingInterval(answer)})`;
  return `refused, ${answer.code}: ${answer.why} ${answer.remedy}`;
}

/** The table of `leadspan spectrum`. */
export function spectrumTable(result: ModelSpectrum, width: number): string {
  const unit = result.kind === 'flow' ? 'per time unit' : 'per step';
  const span = result.kind === 'flow' ? 'time units' : 'steps';
  const { checks } = result;
  const verdict = (agrees: boolean | null) =>
    agrees === null ? '' : agrees ? ', agrees' : ', DOES NOT AGREE';
  return [
    `${result.model} (${result.kind}; ${result.source})`,
    '',
    `Lyapunov exponents, ${unit}, over ${number(result.duration, 6)} ${span}`,
    ...result.exponents.map((exponent, i) =>
      exponent.ok
        ? `  ${String(i + 1).padStart(3)}  ${exponent.value.toFixed(6).padStart(12)}  ± ${number(result.standardErrors[i]!, 2)} (standard error)`
        : `  ${String(i + 1).padStart(3)}  refused, ${exponent.code}: ${exponent.why}`,
    ),
    '',
    `Kaplan–Yorke dimension  ${answerText(result.kaplanYorke)}`,
    checks.sum === null
      ? 'Sum of exponents        not checked: fewer exponents than variables'
      : `Sum of exponents        ${number(checks.sum, 6)}; mean divergence of the field ${number(checks.meanDivergence, 6)}${verdict(checks.divergenceAgrees)}`,
    ...(checks.zeroExponent === null
      ? []
      : [`Exponent nearest zero   ${number(checks.zeroExponent, 2)}${verdict(checks.zeroAgrees)}`]),
    wrap(`Method: ${result.method}; derivatives: ${result.derivatives}.`, width, '  '),
    '',
  ].join('\n');
}
