/** The messages between the window and its host, and the checks both ends apply to them. */
import { config, z } from 'zod';

// The page's content policy forbids building code from text, so the checks are interpreted.
config({ jitless: true });

/** Most bytes one `read` returns. */
export const READ_LIMIT = 64 * 1024 * 1024;
/** Most bytes of content handed over without a path (`offer`), and of a file to save. */
export const CONTENT_LIMIT = 2 * 1024 * 1024 * 1024;
/** Most bytes of a session document. */
export const SESSION_LIMIT = 64 * 1024 * 1024;
/** Most bytes of any other message. */
export const MESSAGE_LIMIT = 64 * 1024;
/** Longest file name handed over, characters. */
const NAME_LIMIT = 255;

/** The handle of a file: 128 random bits. */
export const fileId = z.string().regex(/^[0-9a-f]{32}$/);

const count = z.number().int().nonnegative().max(Number.MAX_SAFE_INTEGER);

/** A plain file name: no folder in it, no control character. */
export const fileName = z
  .string()
  .max(NAME_LIMIT)
  .regex(/^[^/\\\p{Cc}]+$/u, 'a file name without a folder or control characters is expected')
  .refine(name => name !== '.' && name !== '..', { message: 'a file name is expected' });

export const hostFile = z.strictObject({ id: fileId, name: z.string(), size: count });
export const hostFiles = z.array(hostFile);
export const hostInfo = z.strictObject({
  version: z.string(),
  shell: z.enum(['electron', 'loopback']),
  platform: z.string(),
});

const extension = z.string().regex(/^[a-z0-9]{1,16}$/i);

/** What each call carries to the host; bytes travel beside it. */
export const requests = {
  info: z.strictObject({}),
  startFiles: z.strictObject({}),
  open: z.strictObject({}),
  offer: z.strictObject({ name: fileName }),
  read: z.strictObject({ id: fileId, offset: count, length: count.max(READ_LIMIT) }),
  save: z.strictObject({ name: fileName, extensions: z.array(extension).max(32) }),
  readSession: z.strictObject({ id: fileId }),
  writeSession: z.strictObject({ id: fileId, json: z.string().max(SESSION_LIMIT) }),
  recent: z.strictObject({}),
  watch: z.strictObject({ id: fileId, on: z.boolean() }),
} as const;

export type Method = keyof typeof requests;
export type Request<M extends Method> = z.infer<(typeof requests)[M]>;

/** What each call brings back; null where it is bytes. */
export const answers = {
  info: hostInfo,
  startFiles: hostFiles,
  open: hostFiles,
  offer: hostFile,
  read: z.custom<Uint8Array>(value => value instanceof Uint8Array),
  save: z.string().nullable(),
  readSession: z.string().nullable(),
  writeSession: z.null(),
  recent: hostFiles,
  watch: z.null(),
} as const satisfies Record<Method, z.ZodType>;

export type Answer<M extends Method> = z.infer<(typeof answers)[M]>;

export const hostEvent = z.discriminatedUnion('type', [
  z.strictObject({ type: z.literal('opened'), files: hostFiles }),
  z.strictObject({ type: z.literal('changed'), file: hostFile }),
  z.strictObject({ type: z.literal('command'), command: z.string().min(1).max(100) }),
]);

/** Why a call failed, fit to show. */
export const failure = z.strictObject({ code: z.string(), message: z.string() });

/** An answer as it crosses the border. */
export const envelope = z.discriminatedUnion('ok', [
  z.strictObject({ ok: z.literal(true), value: z.unknown() }),
  z.strictObject({ ok: z.literal(false), error: failure }),
]);

/**
 * A call to the host that failed.
 *
 * Codes: `bad-request`, `unknown-file`, `file-changed`, `not-readable`, `not-written`, `too-large`, `unauthorised`, `unreachable`, `unsupported`, `internal`.
 */
export class HostError extends Error {
  readonly code: string;

  constructor(code: string, message: string, cause?: unknown) {
    super(message, cause === undefined ? undefined : { cause });
    this.name = 'HostError';
    this.code = code;
  }
}

/** One line for each thing that is wrong with a message. */
export function describeIssues(error: z.ZodError): string {
  return error.issues.map(issue => `${issue.path.join('.') || 'message'}: ${issue.message}`).join('; ');
}
