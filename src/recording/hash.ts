/**
 * FNV-1a, 64 bits (Fowler, Noll & Vo; IETF draft-eastlake-fnv), kept in two 32-bit halves: the prime is
 * 2^40 + 435, so one multiplication is two products below 2^42, exact in a double.
 */
export class Fnv64 {
  #low = 0x84222325; // offset basis 0xcbf29ce484222325
  #high = 0xcbf29ce4;

  bytes(bytes: Uint8Array): this {
    let low = this.#low;
    let high = this.#high;
    for (let i = 0; i < bytes.length; i++) {
      low = (low ^ bytes[i]!) >>> 0;
      const product = low * 435;
      const carry = Math.floor(product / 0x100000000);
      high = (high * 435 + ((low << 8) >>> 0) + carry) >>> 0;
      low = product >>> 0;
    }
    this.#low = low;
    this.#high = high;
    return this;
  }

  /** The values' little-endian bytes; every NaN counts as the same one, −0 as 0. */
  numbers(values: Float64Array): this {
    const chunk = 4096;
    const view = new DataView(new ArrayBuffer(8 * Math.min(chunk, values.length)));
    for (let from = 0; from < values.length; from += chunk) {
      const to = Math.min(from + chunk, values.length);
      for (let i = from; i < to; i++) {
        const v = values[i]!;
        view.setFloat64((i - from) * 8, Number.isNaN(v) ? Number.NaN : v + 0, true);
      }
      this.bytes(new Uint8Array(view.buffer, 0, (to - from) * 8));
    }
    return this;
  }

  /** 16 hexadecimal digits. */
  toString(): string {
    return this.#high.toString(16).padStart(8, '0') + this.#low.toString(16).padStart(8, '0');
  }
}
