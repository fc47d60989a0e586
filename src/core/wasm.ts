import { Heap } from './heap.ts';

/** A kernel as the wasm module exports it: numbers in (addresses, counts, doubles), a return code or number out. */
type KernelExport = (...args: number[]) => number;

/** An instance of the kernels with its memory. The only holder of the ABI besides the marshalling files here. */
export interface WasmContext {
  readonly heap: Heap;
  /** Calls an export by name; throws if the module does not have it. */
  call(name: string, ...args: number[]): number;
}

export function instantiate(module: WebAssembly.Module): WasmContext {
  // The module imports nothing: kernels cannot reach the host.
  const instance = new WebAssembly.Instance(module, {});
  const exports = instance.exports as Record<string, unknown>;
  const heapBase = (exports.heapBase as KernelExport)();
  return {
    heap: new Heap(exports.memory as WebAssembly.Memory, heapBase),
    call: (name, ...args) => (exports[name] as KernelExport)(...args),
  };
}
