import { type ErrorCode, type ErrorDetails, RainprintError } from '../errors.js';

/** An error as plain data: between threads an error keeps its message and loses its class and code. */
export interface CarriedError {
  readonly code: ErrorCode | null;
  readonly message: string;
  readonly details: ErrorDetails;
  readonly stack: string;
}

export function carryError(error: unknown): CarriedError {
  const message = error instanceof Error ? error.message : String(error);
  const stack = error instanceof Error ? (error.stack ?? '') : '';
  if (error instanceof RainprintError) return { code: error.code, message, details: error.details, stack };
  return { code: null, message, details: {}, stack };
}

export function revivedError({ code, message, details, stack }: CarriedError): Error {
  const error = code === null ? new Error(message) : new RainprintError(code, message, details);
  error.stack = stack;
  return error;
}
