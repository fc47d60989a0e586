import scalarDeflated from '../../dist/wasm/leadspan-scalar.wasm';
import simdDeflated from '../../dist/wasm/leadspan-simd.wasm';
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
    if (choice !== 'wasm-scalar') {
      const bytes = await inflate(simdDeflated);
      if (choice === 'wasm-simd' || WebAssembly.validate(bytes))
        return { backend: 'wasm-simd', module: await WebAssembly.compile(bytes) };
    }
    return { backend: 'wasm-scalar', module: await WebAssembly.compile(await inflate(scalarDeflated)) };
  } catch (cause) {
    // A policy without 'wasm-unsafe-eval' refuses compilation: plain JavaScript gives the same bits.
    if (choice === 'auto' && options.wasm === undefined) return { backend: 'js', module: null };
    throw new LeadspanError('KERNEL_FAILED', `The wasm kernels did not load: ${(cause as Error).message}`, {
      cause,
    });
  }
}

/** The wasm travels deflated (RFC 1951). */
async function inflate(deflated: Uint8Array<ArrayBuffer>): Promise<ArrayBuffer> {
  const stream = new Blob([deflated]).stream().pipeThrough(new DecompressionStream('deflate-raw'));
  return new Response(stream).arrayBuffer();
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
