/**
 * False neighbours (Kennel, Brown & Abarbanel 1992) and the sums of Cao (1997), added up in order of the points.
 * @param out f64[5]: judged, false, expansion sum, step sum, pairs
 */
export function falseNeighbourCounts(
  data: usize, starts: usize, neighbours: usize, distances: usize, count: i32,
  nextOffset: i32, threshold: f64, judgeableDistance: f64, out: usize,
): void {
  const next = data + (<usize>nextOffset << 3);
  let judged = 0;
  let falseNeighbours = 0;
  let expansionSum: f64 = 0;
  let stepSum: f64 = 0;
  let pairs = 0;
  for (let i = 0; i < count; i++) {
    const j = load<i32>(neighbours + (<usize>i << 2));
    const distance = load<f64>(distances + (<usize>i << 3));
    if (j < 0 || !(distance > 0)) continue;
    const a = load<f64>(next + (<usize>load<i32>(starts + (<usize>i << 2)) << 3));
    const b = load<f64>(next + (<usize>load<i32>(starts + (<usize>j << 2)) << 3));
    const step = Math.abs(a - b);
    if (!(step < Infinity)) continue; // a missing sample (NaN)
    expansionSum += (step > distance ? step : distance) / distance;
    stepSum += step;
    pairs++;
    if (distance > judgeableDistance) continue;
    judged++;
    falseNeighbours += i32(step > threshold * distance);
  }
  store<f64>(out, <f64>judged);
  store<f64>(out, <f64>falseNeighbours, 8);
  store<f64>(out, expansionSum, 16);
  store<f64>(out, stepSum, 24);
  store<f64>(out, <f64>pairs, 32);
}

/**
 * Joint histograms of (symbol[t], symbol[t + lag]). Missing symbols are renamed `bins` first, a row and a column
 * that are dropped at the end, so that the loop has no branch. Even and odd t count into a table each:
 * equal cells in a row would wait for one another's store.
 * @param symbols u8[length], changed
 * @param tables scratch, u32[2·(bins + 1)²]
 * @param out f64[lagCount·bins²]
 */
export function jointCounts(
  symbols: usize, length: i32, bins: i32, lags: usize, lagCount: i32, tables: usize, out: usize,
): void {
  const side = <usize>bins + 1;
  const cells = side * side;
  const even = tables;
  const odd = tables + (cells << 2);
  const end = symbols + <usize>length;
  for (let at = symbols; at < end; at++) {
    const s = <i32>load<u8>(at);
    store<u8>(at, <u8>(s < bins ? s : bins));
  }
  for (let l = 0; l < lagCount; l++) {
    const lag = load<i32>(lags + (<usize>l << 2));
    memory.fill(tables, 0, cells << 3);
    if (lag < length) {
      let a = symbols;
      let b = symbols + <usize>lag;
      for (; b + 1 < end; a += 2, b += 2) {
        const first = even + ((<usize>load<u8>(a) * side + <usize>load<u8>(b)) << 2);
        store<u32>(first, load<u32>(first) + 1);
        const second = odd + ((<usize>load<u8>(a, 1) * side + <usize>load<u8>(b, 1)) << 2);
        store<u32>(second, load<u32>(second) + 1);
      }
      if (b < end) {
        const cell = even + ((<usize>load<u8>(a) * side + <usize>load<u8>(b)) << 2);
        store<u32>(cell, load<u32>(cell) + 1);
      }
    }
    for (let row: usize = 0; row < <usize>bins; row++)
      for (let column: usize = 0; column < <usize>bins; column++, out += 8) {
        const cell = (row * side + column) << 2;
        store<f64>(out, <f64>load<u32>(even + cell) + <f64>load<u32>(odd + cell));
      }
  }
}
