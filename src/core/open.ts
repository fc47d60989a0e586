import scalarBytes from '../../dist/wasm/leadspan-scalar.wasm';
import simdBytes from '../../dist/wasm/leadspan-simd.wasm';
import { badOption, LeadspanError } from '../base/errors.ts';
import type { BackendName, Kernels } from '../base/kernels.ts';
import { type BackendModule, createKernels } from './create.ts';
import { instantiate } from './wasm.ts';

export interface OpenOptions {
  /**
   * 'auto' (default): wasm with SIMD, else wasm without, else plain JavaScript. 'wasm' refuses the last.
   * The other three force one build.
   */
  readonly backend?: 'auto' | 'wasm' | BackendName;
  /**
   * The wasm from elsewhere than the inlined bytes, for hosts whose policy wants files: bytes, a compiled
   * module, or a URL (fetched). Shipped as `leadspan/leadspan-simd.wasm` and `leadspan/leadspan-scalar.wasm`.
   */
  readonly wasm?: WasmSource;
}

/** Bytes, URL, or a compiled `WebAssembly.Module` (typed as object, so that the types need no DOM library). */
export type WasmSource = Uint8Array | ArrayBuffer | string | object;

const CHOICES = ['auto', 'wasm', 'wasm-simd', 'wasm-scalar', 'js'] as const;

/** Picks and compiles a build by feature detection. */
export async function loadBackend(options: OpenOptions = {}): Promise<BackendModule> {
  const choice = options.backend ?? 'auto';
  if (!CHOICES.includes(choice)) badOption('backend', `one of ${CHOICES.join(', ')}`, choice);
  if (choice === 'js') return { backend: 'js', module: null };
  if (typeof WebAssembly !== 'object') {
    if (choice === 'auto') return { backend: 'js', module: null };
    throw new LeadspanError('KERNEL_FAILED', `This host has no WebAssembly; backend '${choice}' cannot run.`);
  }
  try {
    if (options.wasm !== undefined) return await fromOutside(options.wasm);
    const simd = choice === 'wasm-simd' || (choice !== 'wasm-scalar' && WebAssembly.validate(simdBytes));
    const module = await WebAssembly.compile(simd ? simdBytes : scalarBytes);
    return { backend: simd ? 'wasm-simd' : 'wasm-scalar', module };
  } catch (cause) {
    // A policy without 'wasm-unsafe-eval' refuses compilation: plain JavaScript gives the same bits.
    if (choice === 'auto' && options.wasm === undefined) return { backend: 'js', module: null };
    throw new LeadspanError('KERNEL_FAILED', `The wasm kernels did not load: ${(cause as Error).message}`, {
      cause,
    });
  }
}

async function fromOutside(wasm: WasmSource): Promise<BackendModule> {
  let module: WebAssembly.Module;
  if (wasm instanceof WebAssembly.Module) module = wasm;
  else if (typeof wasm === 'string' || wasm instanceof URL) {
    const response = await fetch(wasm);
    if (!response.ok) throw new Error(`${response.status} for ${wasm}`);
    module = await WebAssembly.compile(await response.arrayBuffer());
  } else module = await WebAssembly.compile(wasm as BufferSource);
  const context = instantiate(module);
  return { backend: context.call('hasSimd') === 1 ? 'wasm-simd' : 'wasm-scalar', module };
}

/**
 * The raw numerics, synchronous over typed arrays, for people who build their own analysis.
 * @throws LeadspanError BAD_OPTION, KERNEL_FAILED
 */
export async function openKernels(options: OpenOptions = {}): Promise<Kernels> {
  return createKernels(await loadBackend(options));
}
