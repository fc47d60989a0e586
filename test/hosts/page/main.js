import { createEngine } from 'leadspan';
import { comparable, hostRecord } from './record.mjs';

const show = (value) => {
  document.getElementById('result').textContent = JSON.stringify(value);
};
try {
  const engine = await createEngine({ threads: 1 });
  const controller = new AbortController();
  const progress = [];
  const assessment = await engine.assess(hostRecord(), { onProgress: (p) => progress.push(p.fraction) });
  const start = performance.now();
  const cancelled = engine
    .assess(hostRecord(), { signal: controller.signal })
    .catch((e) => ({ code: e.code, after: performance.now() - start }));
  controller.abort();
  const abort = await cancelled;
  show({
    info: engine.info,
    call: assessment.regime.call,
    backend: assessment.provenance.backend,
    bits: comparable(assessment),
    progress: progress.length,
    last: progress.at(-1),
    abort,
  });
  await engine.close();
} catch (error) {
  show({ error: String(error), stack: error?.stack });
}
