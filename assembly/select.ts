/**
 * Quickselect (Hoare 1961) with the median of three over an array of starts, the key of a start being
 * keys[start]: afterwards no key before position `k` is above one from `k` on.
 */
export function selectStarts(keys: usize, starts: usize, from: i32, to: i32, k: i32): void {
  let left = from;
  let right = to;
  while (left < right) {
    const a = key(keys, starts, left);
    const b = key(keys, starts, (left + right) >> 1);
    const c = key(keys, starts, right);
    const low = a < b ? a : b;
    const high = a < b ? b : a;
    const below = high < c ? high : c;
    const pivot = low > below ? low : below;
    let i = starts + (<usize>left << 2);
    let j = starts + (<usize>right << 2);
    while (i <= j) {
      let x = load<i32>(i);
      while (load<f64>(keys + (<usize>x << 3)) < pivot) {
        i += 4;
        x = load<i32>(i);
      }
      let y = load<i32>(j);
      while (load<f64>(keys + (<usize>y << 3)) > pivot) {
        j -= 4;
        y = load<i32>(j);
      }
      if (i > j) break;
      store<i32>(i, y);
      store<i32>(j, x);
      i += 4;
      j -= 4;
    }
    const position = starts + (<usize>k << 2);
    if (position <= j) right = <i32>((j - starts) >> 2);
    else if (position >= i) left = <i32>((i - starts) >> 2);
    else return;
  }
}

// @ts-ignore: decorator
@inline function key(keys: usize, starts: usize, at: i32): f64 {
  return load<f64>(keys + (<usize>load<i32>(starts + (<usize>at << 2)) << 3));
}

/**
 * Sorts `indices` [from, to] ascending, `distances` carried along: quicksort down to short pieces, then
 * insertion. Indices are distinct. Recursion takes the shorter side: at most 31 levels.
 */
export function sortRow(indices: usize, distances: usize, from: i32, to: i32): void {
  let left = from;
  let right = to;
  while (right - left > 16) {
    const a = load<i32>(indices + (<usize>left << 2));
    const b = load<i32>(indices + (<usize>((left + right) >> 1) << 2));
    const c = load<i32>(indices + (<usize>right << 2));
    const low = a < b ? a : b;
    const high = a < b ? b : a;
    const below = high < c ? high : c;
    const pivot = low > below ? low : below;
    let i = left;
    let j = right;
    while (i <= j) {
      while (load<i32>(indices + (<usize>i << 2)) < pivot) i++;
      while (load<i32>(indices + (<usize>j << 2)) > pivot) j--;
      if (i > j) break;
      const index = load<i32>(indices + (<usize>i << 2));
      store<i32>(indices + (<usize>i << 2), load<i32>(indices + (<usize>j << 2)));
      store<i32>(indices + (<usize>j << 2), index);
      const distance = load<f64>(distances + (<usize>i << 3));
      store<f64>(distances + (<usize>i << 3), load<f64>(distances + (<usize>j << 3)));
      store<f64>(distances + (<usize>j << 3), distance);
      i++;
      j--;
    }
    if (j - left < right - i) {
      sortRow(indices, distances, left, j);
      left = i;
    } else {
      sortRow(indices, distances, i, right);
      right = j;
    }
  }
  for (let i = left + 1; i <= right; i++) {
    const index = load<i32>(indices + (<usize>i << 2));
    const distance = load<f64>(distances + (<usize>i << 3));
    let p = i;
    while (p > left && load<i32>(indices + (<usize>(p - 1) << 2)) > index) {
      store<i32>(indices + (<usize>p << 2), load<i32>(indices + (<usize>(p - 1) << 2)));
      store<f64>(distances + (<usize>p << 3), load<f64>(distances + (<usize>(p - 1) << 3)));
      p--;
    }
    store<i32>(indices + (<usize>p << 2), index);
    store<f64>(distances + (<usize>p << 3), distance);
  }
}
