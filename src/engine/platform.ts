/** The few parts of Node used when it is there; nothing is imported, so that bundles for browsers stay clean. */
interface NodeParts {
  'node:worker_threads': {
    readonly Worker: new (source: string, options: { eval: boolean; name: string }) => NodeWorker;
    readonly parentPort: {
      postMessage(message: unknown): void;
      on(event: 'message', listener: (m: never) => void): void;
    } | null;
  };
  'node:os': { availableParallelism(): number };
}

export interface NodeWorker {
  postMessage(message: unknown): void;
  on(event: string, listener: (value: never) => void): void;
  terminate(): Promise<number>;
  ref(): void;
  unref(): void;
}

/**
 * A Node built-in, or undefined in other hosts. `process.getBuiltinModule` (Node 20.16 and 22.3 on) needs no
 * import statement that a browser bundler would try to resolve.
 */
export function builtin<Name extends keyof NodeParts>(name: Name): NodeParts[Name] | undefined {
  const host = globalThis as { process?: { getBuiltinModule?: (name: string) => unknown } };
  return host.process?.getBuiltinModule?.(name) as NodeParts[Name] | undefined;
}

/** Threads the host offers; 1 when it does not say. */
export function availableThreads(): number {
  const host = globalThis as { navigator?: { hardwareConcurrency?: number } };
  return builtin('node:os')?.availableParallelism() ?? host.navigator?.hardwareConcurrency ?? 1;
}
