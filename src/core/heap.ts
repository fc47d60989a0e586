import { LeadspanError } from '../base/errors.ts';

const PAGE = 65_536;
/** Blocks start at multiples of 16 bytes, so that v128 loads are aligned. */
const ALIGNMENT = 16;

interface Block {
  readonly address: number;
  readonly bytes: number;
}

/**
 * Owner of the linear memory above the kernels' static data: first fit over an address-ordered list of
 * free blocks, neighbours merged on release. Long-lived blocks (trees) may be freed in any order; what one
 * call needs is taken in a `scope` and given back together. Kernels never allocate.
 */
export class Heap {
  readonly memory: WebAssembly.Memory;
  #free: Block[] = [];
  #used = new Map<number, number>();
  #end: number;
  #bytesUsed = 0;
  #peak = 0;

  constructor(memory: WebAssembly.Memory, base: number) {
    this.memory = memory;
    this.#end = align(base);
  }

  get used(): number {
    return this.#bytesUsed;
  }

  get peak(): number {
    return this.#peak;
  }

  /** Address of a fresh block. Growing the memory detaches earlier views: make views after all allocations. */
  allocate(bytes: number): number {
    const size = align(Math.max(bytes, ALIGNMENT));
    const slot = this.#free.findIndex((block) => block.bytes >= size);
    let address: number;
    if (slot >= 0) {
      const block = this.#free[slot]!;
      address = block.address;
      if (block.bytes === size) this.#free.splice(slot, 1);
      else this.#free[slot] = { address: address + size, bytes: block.bytes - size };
    } else {
      address = this.#end;
      this.#grow(address + size);
      this.#end = address + size;
    }
    this.#used.set(address, size);
    this.#bytesUsed += size;
    this.#peak = Math.max(this.#peak, this.#bytesUsed);
    return address;
  }

  free(address: number): void {
    const bytes = this.#used.get(address);
    if (bytes === undefined) throw new RangeError(`no block at ${address}`);
    this.#used.delete(address);
    this.#bytesUsed -= bytes;
    let slot = this.#free.findIndex((block) => block.address > address);
    if (slot < 0) slot = this.#free.length;
    let merged: Block = { address, bytes };
    const after = this.#free[slot];
    if (after && after.address === address + bytes) {
      merged = { address, bytes: bytes + after.bytes };
      this.#free.splice(slot, 1);
    }
    const before = this.#free[slot - 1];
    if (before && before.address + before.bytes === address) {
      merged = { address: before.address, bytes: before.bytes + merged.bytes };
      this.#free.splice(slot - 1, 1);
      slot--;
    }
    if (merged.address + merged.bytes === this.#end) this.#end = merged.address;
    else this.#free.splice(slot, 0, merged);
  }

  /** Runs `work` with a scope whose blocks are all freed afterwards, also when it throws. */
  scope<T>(work: (scope: Scope) => T): T {
    const scope = new Scope(this);
    try {
      return work(scope);
    } finally {
      scope.release();
    }
  }

  f64(address: number, length: number): Float64Array {
    return new Float64Array(this.memory.buffer, address, length);
  }

  i32(address: number, length: number): Int32Array {
    return new Int32Array(this.memory.buffer, address, length);
  }

  u8(address: number, length: number): Uint8Array {
    return new Uint8Array(this.memory.buffer, address, length);
  }

  #grow(end: number): void {
    const missing = end - this.memory.buffer.byteLength;
    if (missing <= 0) return;
    try {
      this.memory.grow(Math.ceil(missing / PAGE));
    } catch (cause) {
      throw new LeadspanError(
        'MEMORY_LIMIT',
        `The kernels need ${end} bytes of linear memory; the host gives no more.`,
        {
          cause,
        },
      );
    }
  }
}

/** Blocks of one kernel call. */
export class Scope {
  readonly heap: Heap;
  #blocks: number[] = [];

  constructor(heap: Heap) {
    this.heap = heap;
  }

  /** Address of `bytes` fresh bytes (contents undefined). */
  take(bytes: number): number {
    const address = this.heap.allocate(bytes);
    this.#blocks.push(address);
    return address;
  }

  /** Address of a copy of the array. */
  put(array: Float64Array | Int32Array | Uint8Array): number {
    const address = this.take(array.byteLength);
    new Uint8Array(this.heap.memory.buffer, address, array.byteLength).set(
      new Uint8Array(array.buffer, array.byteOffset, array.byteLength),
    );
    return address;
  }

  /** Copies of results out of linear memory, for the caller to keep. */
  copyF64(address: number, length: number): Float64Array {
    return this.heap.f64(address, length).slice();
  }

  copyI32(address: number, length: number): Int32Array {
    return this.heap.i32(address, length).slice();
  }

  release(): void {
    for (const address of this.#blocks) this.heap.free(address);
    this.#blocks = [];
  }
}

function align(bytes: number): number {
  return Math.ceil(bytes / ALIGNMENT) * ALIGNMENT;
}
