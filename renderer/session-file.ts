/**
 * The session file that lies beside an opened input: the person's judgements on its units, as plain JSON.
 *
 *     {"deasilSession":1,"input":"poses.sdf","judgements":[{"entry":3,"atoms":[7],"mark":"accepted","remark":""}]}
 *
 * `atoms` are 1-based in input order; `mark` is accepted, rejected, question or null.
 */
import { z } from 'zod';
import type { Judgement } from './store.ts';

const document = z.object({
  deasilSession: z.literal(1),
  input: z.string(),
  judgements: z.array(
    z.object({
      entry: z.number().int().positive(),
      atoms: z.array(z.number().int().positive()),
      mark: z.enum(['accepted', 'rejected', 'question']).nullable(),
      remark: z.string(),
    }),
  ),
});

export function sessionText(input: string, judgements: Readonly<Record<string, Judgement>>): string {
  const list = Object.entries(judgements).map(([key, { mark, remark }]) => {
    const [entry, atoms] = key.slice(input.length + 1).split(':');
    return { entry: Number(entry), atoms: (atoms ?? '').split('-').map(Number), mark, remark };
  });
  return `${JSON.stringify({ deasilSession: 1, input, judgements: list }, null, 1)}\n`;
}

/** Judgements by their keys. @throws Error that says what is wrong with the document. */
export function parseSession(text: string): Record<string, Judgement> {
  let value: unknown;
  try {
    value = JSON.parse(text);
  } catch (error) {
    throw new Error('the session file beside the input is not JSON; it is left as it is', { cause: error });
  }
  const parsed = document.safeParse(value);
  if (!parsed.success) {
    const issue = parsed.error.issues[0];
    throw new Error(
      `the session file beside the input was not understood (${issue?.path.join('.') ?? ''}: ${issue?.message ?? ''})`,
    );
  }
  const { input, judgements } = parsed.data;
  return Object.fromEntries(
    judgements.map(({ entry, atoms, mark, remark }) => [
      `${input}#${entry}:${atoms.join('-')}`,
      { mark, remark },
    ]),
  );
}
