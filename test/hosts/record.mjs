/**
 * A record every host can make bit for bit without this library: the logistic map at r = 4, with only
 * exact IEEE 754 operations. 1,500 samples.
 */
export function hostRecord() {
  const samples = new Float64Array(1500);
  let x = 0.3;
  for (let i = 0; i < samples.length; i++) {
    samples[i] = x;
    x = 4 * x * (1 - x);
  }
  return { samples, interval: 1, timeUnit: 'step', name: 'logistic map' };
}

/** What must be the same on every host: all but the backend's name and the times it took. */
export function comparable(assessment) {
  const { backend, elapsed, ...provenance } = assessment.provenance;
  return JSON.stringify({ ...assessment, provenance });
}
