// Modified Gram–Schmidt, right-looking; twin of gramSchmidt in src/fallback/fits.ts. Sums run over the rows
// in order; two later columns go together in the SIMD build, which leaves each one's order as it is.

/**
 * Columns 0 … columns − 1 of the row-major matrix with `width` (≥ columns) doubles to a row are made
 * orthonormal. Norms go to norms[0 … columns). dots: scratch of `width` doubles.
 */
export function gramSchmidt(a: usize, rows: i32, columns: i32, width: i32, norms: usize, dots: usize): void {
  const stride = (<usize>width) << 3;
  for (let j = 0; j < columns; j++) {
    const column = a + ((<usize>j) << 3);
    let square: f64 = 0;
    for (let r = 0, at = column; r < rows; r++, at += stride) {
      const x = load<f64>(at);
      square += x * x;
    }
    const norm = sqrt(square);
    store<f64>(norms + ((<usize>j) << 3), norm);
    const inverse = norm > 0 ? 1 / norm : 0;
    const later = j + 1;
    memory.fill(dots, 0, stride);
    for (let r = 0; r < rows; r++) {
      const at = a + <usize>r * stride;
      const x = load<f64>(at + ((<usize>j) << 3)) * inverse;
      store<f64>(at + ((<usize>j) << 3), x);
      let l = later;
      if (ASC_FEATURE_SIMD) {
        const xx = f64x2.splat(x);
        for (; l + 1 < columns; l += 2) {
          const o = (<usize>l) << 3;
          v128.store(dots + o, f64x2.add(v128.load(dots + o), f64x2.mul(xx, v128.load(at + o))));
        }
      }
      for (; l < columns; l++) {
        const o = (<usize>l) << 3;
        store<f64>(dots + o, load<f64>(dots + o) + x * load<f64>(at + o));
      }
    }
    for (let r = 0; r < rows; r++) {
      const at = a + <usize>r * stride;
      const x = load<f64>(at + ((<usize>j) << 3));
      let l = later;
      if (ASC_FEATURE_SIMD) {
        const xx = f64x2.splat(x);
        for (; l + 1 < columns; l += 2) {
          const o = (<usize>l) << 3;
          v128.store(at + o, f64x2.sub(v128.load(at + o), f64x2.mul(v128.load(dots + o), xx)));
        }
      }
      for (; l < columns; l++) {
        const o = (<usize>l) << 3;
        store<f64>(at + o, load<f64>(at + o) - load<f64>(dots + o) * x);
      }
    }
  }
}
