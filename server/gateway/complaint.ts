import type { z } from 'zod';

/** The first complaint of a schema as one sentence, naming the field. */
export function complaint(error: z.ZodError): string {
  const issue = error.issues[0]!;
  return issue.path.length > 0 ? `${issue.path.join('.')}: ${issue.message}` : issue.message;
}
