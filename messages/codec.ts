/**
 * Bytes on the wire to messages and back. Reading answers value or reason and never throws, whatever
 * the bytes; writing trusts the types.
 */
import type { z } from 'zod';

export const MESSAGE_BYTES_MAX = 256 * 1024;
/** Whoever sent the bytes chose what stands in the reason; it is cut to what a status can carry. */
const REASON_LENGTH_MAX = 300;

export type Reading<T> = { readonly ok: true; readonly value: T } | { readonly ok: false; readonly reason: string };

const decoder = new TextDecoder('utf-8', { fatal: true });

/**
 * Reads one message of a schema from its bytes (UTF-8 JSON). `fits`, where given, is a quick yes that the
 * schema would say too; what it does not take, the schema decides.
 */
export function readMessage<T>(
  schema: z.ZodType<T>, bytes: Uint8Array, fits?: (value: unknown) => value is T,
): Reading<T> {
  if (bytes.length === 0) return { ok: false, reason: 'is empty' };
  if (bytes.length > MESSAGE_BYTES_MAX) {
    return { ok: false, reason: `has ${bytes.length} bytes, but must have at most ${MESSAGE_BYTES_MAX}` };
  }
  let value: unknown;
  try {
    value = JSON.parse(decoder.decode(bytes));
  } catch {
    return { ok: false, reason: 'is not JSON in UTF-8' };
  }
  if (fits?.(value) === true) return { ok: true, value };
  const parsed = schema.safeParse(value);
  if (parsed.success) return { ok: true, value: parsed.data };
  const issue = parsed.error.issues[0];
  if (issue === undefined) return { ok: false, reason: 'does not fit its schema' };
  return { ok: false, reason: `${issue.path.join('.') || 'message'}: ${issue.message}`.slice(0, REASON_LENGTH_MAX) };
}

/** A message as bytes. */
export function writeMessage(message: unknown): Uint8Array {
  return Buffer.from(JSON.stringify(message));
}
