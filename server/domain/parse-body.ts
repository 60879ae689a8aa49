import { z } from '../../shared/util/zod';
import { Refusal } from '../platform/refusal';

const envelopeSchema = z.object({
  preset: z.object({ gemel: z.number() }).optional().catch(undefined),
  result: z.object({ gemel: z.number() }).optional().catch(undefined),
  state: z.object({ version: z.number() }).optional().catch(undefined),
});

/** The parsed body, or Refusal with the first thing that is wrong and where it is. */
export function parseBody<T>(schema: z.ZodType<T>, body: unknown): T {
  if (body === undefined) {
    throw new Refusal('not-json', 'Expected a JSON body with the header Content-Type: application/json.');
  }
  refuseNewer(body);
  const parsed = schema.safeParse(body);
  if (parsed.success) return parsed.data;
  const issue = parsed.error.issues[0]!;
  const place = issue.path.map(String).join('.');
  throw new Refusal(
    'bad-input',
    `The request cannot be used: ${place === '' ? 'the body' : place} is wrong (${issue.message}).`,
    place === '' ? null : place,
  );
}

/** Every stored shape is at version 1; a page newer than the server is told so, not that a literal is wrong. */
function refuseNewer(body: unknown): void {
  const envelope = envelopeSchema.safeParse(body);
  if (!envelope.success) return;
  const { preset, result, state } = envelope.data;
  const version = Math.max(preset?.gemel ?? 0, result?.gemel ?? 0, state?.version ?? 0);
  if (version > 1) {
    throw new Refusal(
      'newer-version',
      `This was written in version ${version} of its format and the server knows version 1: update the server.`,
    );
  }
}

/** A name as it is stored: trimmed, on one line. PostgreSQL text cannot hold a zero byte. */
export function cleanName(name: string, place: string): string {
  const trimmed = name.trim();
  if (trimmed === '' || /\p{Cc}/u.test(trimmed)) {
    throw new Refusal('bad-input', 'The name must be one line of visible characters.', place);
  }
  return trimmed;
}
