/** What a `LeadspanError` is about. Misuse throws; a record that cannot carry an answer gets a `Refusal`. */
export type ErrorCode = 'BAD_INPUT' | 'BAD_OPTION' | 'ABORTED' | 'MEMORY_LIMIT' | 'KERNEL_FAILED' | 'CLOSED';

/** Survives duplicate copies of the package and realms, where `instanceof` does not. */
const brand = Symbol.for('leadspan.error');

export interface ErrorDetails {
  /** The field or option at fault, e.g. `recording.interval`. */
  readonly field?: string;
  readonly cause?: unknown;
}

/**
 * Misuse, cancellation or a failure of ours. The message names the field, what it got and what it takes.
 * @example
 * try { await engine.assess(record) } catch (e) { if (isLeadspanError(e) && e.code === 'ABORTED') return; throw e; }
 */
export class LeadspanError extends Error {
  readonly code: ErrorCode;
  readonly field: string | undefined;
  readonly [brand] = true;

  constructor(code: ErrorCode, message: string, details: ErrorDetails = {}) {
    super(message, details.cause === undefined ? undefined : { cause: details.cause });
    this.name = 'LeadspanError';
    this.code = code;
    this.field = details.field;
  }
}

/** True for errors of this library, also across copies of the package and worker boundaries. */
export function isLeadspanError(error: unknown): error is LeadspanError {
  return typeof error === 'object' && error !== null && (error as Record<symbol, unknown>)[brand] === true;
}

/** A short, safe rendering of a wrong value for messages. */
export function show(value: unknown): string {
  if (typeof value === 'string') return JSON.stringify(value.length > 40 ? `${value.slice(0, 40)}…` : value);
  if (typeof value === 'number' || typeof value === 'boolean' || value == null) return String(value);
  if (typeof value === 'bigint') return `${value}n`;
  if (typeof value === 'function') return 'a function';
  if (ArrayBuffer.isView(value) || Array.isArray(value))
    return `${value.constructor.name} of length ${(value as ArrayLike<unknown>).length}`;
  return `an object of type ${(value as object).constructor?.name ?? 'unknown'}`;
}

/** Throws `BAD_INPUT` in the house wording: field, what it takes, what it got. */
export function badInput(field: string, takes: string, got: unknown): never {
  throw new LeadspanError('BAD_INPUT', `${field} must be ${takes}; got ${show(got)}.`, { field });
}

/** Throws `BAD_OPTION` in the same wording. */
export function badOption(field: string, takes: string, got: unknown): never {
  throw new LeadspanError('BAD_OPTION', `${field} must be ${takes}; got ${show(got)}.`, { field });
}

/** An error as plain data for a worker message: `structuredClone` alone would drop `code`. */
export interface PlainError {
  readonly code: ErrorCode;
  readonly message: string;
  readonly field?: string;
  readonly stack?: string;
}

export function toPlainError(error: unknown): PlainError {
  const message = error instanceof Error ? error.message : String(error);
  const stack = error instanceof Error ? error.stack : undefined;
  return {
    code: isLeadspanError(error) ? error.code : 'KERNEL_FAILED',
    message,
    ...(isLeadspanError(error) && error.field !== undefined ? { field: error.field } : {}),
    ...(stack === undefined ? {} : { stack }),
  };
}

export function fromPlainError(plain: PlainError): LeadspanError {
  const error = new LeadspanError(
    plain.code,
    plain.message,
    plain.field === undefined ? {} : { field: plain.field },
  );
  if (plain.stack !== undefined) error.stack = plain.stack;
  return error;
}
