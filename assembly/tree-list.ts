// The k best so far of one query: distances and, as f64, ordinals, sorted by (distance, smaller ordinal).
// `list` is the address of distance 0; 8 bytes before it stand −Infinity, the sentinel of the shift.
// Both arrays are padded to an even length; ordinals begin `half` bytes after the distances.

/** Beyond this length a pass costs more than a mispredicted test of whether it is needed. */
const LONG: i32 = 16;

/** Bytes from distances to ordinals: k rounded up to even, and the 16 bytes that hold the sentinel. */
// @ts-ignore: decorator
@inline export function halfOf(k: i32): usize {
  return (<usize>((k + 1) & ~1) << 3) + 16;
}

export function clearList(list: usize, k: i32): void {
  const half = halfOf(k);
  const end = list + half - 16;
  store<f64>(list - 8, -Infinity);
  store<f64>(list + half - 8, -1);
  for (let at = list; at < end; at += 8) {
    store<f64>(at, Infinity);
    store<f64>(at + half, -1);
  }
}

/**
 * Takes a candidate in, if it is among the k best. SIMD: without a branch that depends on the data (mispredicted
 * branches of the list were two thirds of a query's time), since new = max(one before, min(old, candidate)).
 * Up to k = 64 this pass also beats finding the place and moving what is behind it, which stalls on stores
 * that the next insertion reads at another alignment.
 */
// @ts-ignore: decorator
@inline export function insert(list: usize, k: i32, distance: f64, ordinal: i32): void {
  const half = halfOf(k);
  if (ASC_FEATURE_SIMD) {
    if (k > LONG && distance > load<f64>(list + (<usize>(k - 1) << 3))) return;
    const d = v128.splat<f64>(distance);
    const index = v128.splat<f64>(<f64>ordinal);
    let ties = v128.splat<f64>(0);
    for (let at = list + half - 32; at >= list; at -= 16) {
      const old = v128.load(at);
      const before = v128.load(at - 8);
      const oldIndex = v128.load(at + half);
      const indexBefore = v128.load(at + half - 8);
      const shifts = v128.lt<f64>(d, old);
      ties = v128.or(ties, v128.eq<f64>(d, old));
      v128.store(at, v128.pmax<f64>(before, v128.pmin<f64>(old, d)));
      v128.store(
        at + half,
        v128.bitselect(v128.bitselect(indexBefore, index, v128.lt<f64>(d, before)), oldIndex, shifts),
      );
    }
    if (v128.any_true(ties)) settle(list, k, distance, ordinal);
  } else {
    let at = list + (<usize>(k - 1) << 3);
    const index = <f64>ordinal;
    const worst = load<f64>(at);
    if (distance > worst || (distance == worst && load<f64>(at + half) <= index)) return;
    while (at > list) {
      const before = load<f64>(at - 8);
      if (before < distance || (before == distance && load<f64>(at + half - 8) < index)) break;
      store<f64>(at, before);
      store<f64>(at + half, load<f64>(at + half - 8));
      at -= 8;
    }
    store<f64>(at, distance);
    store<f64>(at + half, index);
  }
}

/** Puts a candidate that ties with members of the list among them by ordinal: the pass above left it behind them, or out. */
function settle(list: usize, k: i32, distance: f64, ordinal: i32): void {
  const indices = list + halfOf(k);
  const index = <f64>ordinal;
  let p = k - 1;
  while (p >= 0 && load<f64>(indices + (<usize>p << 3)) != index) p--;
  if (p < 0) {
    p = k - 1;
    const last = <usize>p << 3;
    if (load<f64>(list + last) != distance || load<f64>(indices + last) <= index) return;
    store<f64>(indices + last, index);
  }
  while (p > 0) {
    const at = indices + (<usize>p << 3);
    if (load<f64>(list + (<usize>(p - 1) << 3)) != distance || load<f64>(at - 8) < index) return;
    store<f64>(at, load<f64>(at - 8));
    store<f64>(at - 8, index);
    p--;
  }
}
