import type { Assessment } from '../assess/types.ts';
import type { Answer } from '../base/answer.ts';
import type { RegimeCall } from '../evidence/types.ts';
import { count, duration, findingInterval, findingValue, number, percent, quantity } from './format.ts';
import { html, type Markup } from './html.ts';
import { headline, LIMIT_WORDS, REGIME_WORDS } from './words.ts';

/** Figures of a report by name, already rendered with their captions; null where there is nothing to draw. */
export type Figures = Readonly<
  Record<
    | 'errorGrowth'
    | 'skill'
    | 'surrogates'
    | 'divergence'
    | 'portrait'
    | 'dimension'
    | 'record'
    | 'delay'
    | 'embedding',
    Markup | null
  >
>;

/** The top of the page: the answer first. */
export function answerPlate(assessment: Assessment): Markup {
  const { record, regime, leadTime } = assessment;
  return html`<header><div>
<h1>${record.name || 'Record'}</h1>
<p>${count(record.count)} samples, ${quantity(record.interval, record.timeUnit)} apart: ${duration(record.count * record.interval, record.timeUnit)}</p>
<p class="lead">${headline(assessment)}</p>
<dl class="plate">
<div><dt>Regime</dt><dd>${regime.call}<small>${REGIME_WORDS[regime.call]}; confidence ${percent(regime.confidence)}</small></dd></div>
<div><dt>Lead time</dt><dd>${short(leadTime.trusted)}<small>${leadTime.trusted.ok ? findingInterval(leadTime.trusted) : leadTime.trusted.why}</small></dd></div>
<div><dt>What limits it</dt><dd>${LIMIT_WORDS[leadTime.limitedBy]}<small>${leadTime.limitedByText}</small></dd></div>
</dl>
</div></header>`;
}

export function howFarAhead(assessment: Assessment, figures: Figures): Markup {
  const { leadTime, record } = assessment;
  return html`<section aria-labelledby="ahead"><h2 id="ahead">How far ahead?</h2>
${answersTable('Lead time', [
  [`Whole path within tolerance, ${percent(leadTime.confidence)} of origins`, leadTime.trusted],
  ['The same from the state the record ends in', leadTime.now],
  ['Half of the origins', leadTime.median],
])}
<p>Tolerance: ${quantity(leadTime.tolerance, record.unit)}. Forecast by: ${leadTime.predictor}. Measured on ${count(leadTime.origins)} origins that the forecast had not seen.</p>
${figures.errorGrowth}
<h3>Would a better sensor help?</h3>
<table><tbody><tr><th scope="row">Gain per decimal digit of precision</th>${answerCells(leadTime.perDecimalDigit)}</tr></tbody></table>
${
  leadTime.sensorTable.length > 0 &&
  html`<table><caption>Lead time by sensor noise</caption><thead><tr><th scope="col">Sensor noise (std)</th><th scope="col">Lead time</th><th scope="col">How known</th></tr></thead><tbody>
${leadTime.sensorTable.map(
  (row) =>
    html`<tr><td class="number">${quantity(row.noise, record.unit)}</td><td class="number">${quantity(row.trusted, record.timeUnit)}</td><td>${row.measured ? 'measured, noise added to the record' : 'extrapolated with the largest exponent'}</td></tr>
`,
)}</tbody></table>`
}
</section>`;
}

export function ruleOrNoise(assessment: Assessment, figures: Figures): Markup {
  const { regime, evidence } = assessment;
  const test = evidence.nullTest;
  return html`<section aria-labelledby="rule"><h2 id="rule">Rule or noise?</h2>
<p><span class="says">${capital(regime.call)}</span>, confidence ${percent(regime.confidence)}: ${REGIME_WORDS[regime.call]}.</p>
<table><caption>Evidence</caption><thead><tr><th scope="col">What was found</th><th scope="col">Value</th><th scope="col">Threshold</th><th scope="col">Speaks for</th></tr></thead><tbody>
${regime.reasons.map(
  (reason) =>
    html`<tr><td>${reason.text}</td><td class="number">${reason.value === null ? '–' : number(reason.value)}</td><td class="number">${reason.threshold === null ? '–' : number(reason.threshold)}</td><td>${speaks(reason.speaksFor)}</td></tr>
`,
)}</tbody></table>
<h3>Against linear noise</h3>
${
  'ok' in test
    ? html`<p class="refused"><b>${test.code}</b>: ${test.why} ${test.remedy}</p>`
    : html`<p>Null hypothesis: ${test.nullHypothesis}. Statistic: ${test.statistic}. p = ${test.pValue.toFixed(3)}, ${test.rejected ? 'rejected' : 'not rejected'} at the ${percent(test.level, 1)} level.</p>`
}
${figures.surrogates}
<h3>Is there skill beyond the obvious?</h3>
${figures.skill ?? html`<p>No forecast was made.</p>`}
</section>`;
}

export function whatLimits(assessment: Assessment, figures: Figures): Markup {
  const { exponents, dimension, noise, mechanism, leadTime } = assessment;
  const spectrum = Array.isArray(exponents.spectrum) ? null : (exponents.spectrum as Answer);
  return html`<section aria-labelledby="limits"><h2 id="limits">What limits it?</h2>
<p><span class="says">${capital(LIMIT_WORDS[leadTime.limitedBy])}.</span> ${leadTime.limitedByText}</p>
${answersTable('State space', [
  ['Largest Lyapunov exponent', exponents.largest],
  ['Correlation dimension', dimension.correlation],
  ['Correlation entropy', dimension.entropy],
  ['Measurement noise (std)', noise.level],
  ['Kaplan–Yorke dimension', exponents.kaplanYorke],
  ...(spectrum ? [['Exponent spectrum', spectrum] as const] : []),
])}
${!('kind' in mechanism) && html`<p class="refused">Mechanism: <b>${mechanism.code}</b>: ${mechanism.why}</p>`}
<h3>Growth of small differences</h3>
${figures.divergence ?? html`<p>Not measured.</p>`}
<h3>State-space picture</h3>
${figures.portrait ?? html`<p>Not drawn.</p>`}
<h3>Dimension and its region</h3>
${figures.dimension ?? html`<p>Not measured.</p>`}
</section>`;
}

export function goodEnough(assessment: Assessment, figures: Figures): Markup {
  const { record, reconstruction } = assessment;
  const { resolution, stationarity, quality } = record;
  const rows: (readonly [string, string])[] = [
    [
      'Samples',
      `${count(record.count)}${record.channels > 1 ? ` in each of ${record.channels} channels; channel ${record.target + 1} is judged` : ''}`,
    ],
    ['Missing', `${count(record.gaps.missing)} in ${count(record.gaps.runs)} gaps`],
    [
      'Resolution',
      resolution.step > 0
        ? `${quantity(resolution.step, record.unit)} (${resolution.source === 'given' ? 'given' : 'found in the record'})${resolution.effectiveBits === null ? '' : `, about ${number(resolution.effectiveBits, 2)} effective bits`}`
        : 'no step found: the values look continuous',
    ],
    ['At the ends of the range', `${percent(record.saturatedFraction, 2)} of samples`],
    [
      'Samples per cycle',
      quality.samplesPerCycle === null ? 'no dominant cycle' : number(quality.samplesPerCycle),
    ],
    ['Stationarity', `${stationarity.verdict}. ${stationarity.text}`],
    [
      'Treatment',
      record.treatments.length === 0 ? 'none: analysed as recorded' : record.treatments.join('; '),
    ],
  ];
  return html`<section aria-labelledby="record"><h2 id="record">Was the record good enough?</h2>
${figures.record}
<table><tbody>${rows.map(
    ([label, text]) => html`<tr><th scope="row">${label}</th><td>${text}</td></tr>
`,
  )}</tbody></table>
${
  'ok' in reconstruction
    ? html`<p class="refused">State space: <b>${reconstruction.code}</b>: ${reconstruction.why} ${reconstruction.remedy}</p>`
    : html`<h3>How delay and dimension were chosen</h3>
<p>Delay ${quantity(reconstruction.delay.time, record.timeUnit)} (${reconstruction.delay.samples} samples): ${reconstruction.delay.method}. ${reconstruction.embeddingDimension} coordinates. Decorrelation window ${quantity(reconstruction.theilerWindow.time, record.timeUnit)}: ${reconstruction.theilerWindow.method}. Treated as a ${reconstruction.dynamics === 'map' ? 'map (one sample per step)' : 'flow (sampled continuous motion)'}.</p>
${figures.delay}${figures.embedding}`
}
</section>`;
}

export function cautions(assessment: Assessment): Markup {
  return html`<section aria-labelledby="cautions"><h2 id="cautions">Cautions</h2><ul>
${assessment.cautions.map(
  (caution) => html`<li>${caution.text}</li>
`,
)}</ul></section>`;
}

export function howObtained(assessment: Assessment): Markup {
  const { leadTime, exponents, dimension, noise, provenance } = assessment;
  const answers: (readonly [string, Answer])[] = [
    ['Lead time', leadTime.trusted],
    ['Lead time from now', leadTime.now],
    ['Median lead time', leadTime.median],
    ['Gain per decimal digit', leadTime.perDecimalDigit],
    ['Largest exponent', exponents.largest],
    ['Correlation dimension', dimension.correlation],
    ['Correlation entropy', dimension.entropy],
    ['Noise level', noise.level],
  ];
  return html`<section aria-labelledby="methods"><h2 id="methods">How each number was obtained</h2>
<table><thead><tr><th scope="col">Number</th><th scope="col">Method</th></tr></thead><tbody>
${answers.map(
  ([
    label,
    answer,
  ]) => html`<tr><th scope="row">${label}</th><td>${answer.ok ? answer.method : html`<span class="refused">refused: ${answer.remedy}</span>`}</td></tr>
`,
)}</tbody></table>
<p>leadspan ${provenance.version}, seed ${provenance.seed}, input <code>${provenance.inputHash}</code>, computed by ${provenance.backend}. Options: <code>${JSON.stringify(provenance.options)}</code></p>
</section>`;
}

function answersTable(caption: string, rows: readonly (readonly [string, Answer])[]): Markup {
  return html`<table><caption>${caption}</caption><tbody>
${rows.map(
  ([label, answer]) => html`<tr><th scope="row">${label}</th>${answerCells(answer)}</tr>
`,
)}</tbody></table>`;
}

function answerCells(answer: Answer): Markup {
  return answer.ok
    ? html`<td class="number">${findingValue(answer)}</td><td>${findingInterval(answer)}</td>`
    : html`<td class="refused">refused</td><td class="refused"><b>${answer.code}</b>: ${answer.why} ${answer.remedy}</td>`;
}

const short = (answer: Answer) => (answer.ok ? findingValue(answer) : 'refused');
const speaks = (call: RegimeCall | 'none') => (call === 'none' ? 'neither' : call);
const capital = (text: string) => text.charAt(0).toUpperCase() + text.slice(1);
