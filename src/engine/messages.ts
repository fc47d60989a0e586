import type { PlainError } from '../base/errors.ts';
import type { BackendModule } from '../core/create.ts';

/** What the engine sends to a worker. */
export type ToWorker =
  | { readonly kind: 'start'; readonly backend: BackendModule }
  | { readonly kind: 'task'; readonly id: number; readonly task: string; readonly input: unknown }
  | { readonly kind: 'cancel'; readonly id: number };

/** What a worker sends back. */
export type FromWorker =
  | { readonly kind: 'ready' }
  | { readonly kind: 'unready'; readonly error: PlainError }
  | { readonly kind: 'progress'; readonly id: number; readonly fraction: number }
  | { readonly kind: 'done'; readonly id: number; readonly output: unknown }
  | { readonly kind: 'failed'; readonly id: number; readonly error: PlainError };
