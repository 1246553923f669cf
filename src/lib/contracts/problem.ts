import { z } from 'zod';

/** What went wrong, as RFC 9457 describes it. */
export const problemSchema = z.looseObject({
	/** Names the kind of problem; relative to the product's own address. */
	type: z.string(),
	title: z.string(),
	status: z.int(),
	detail: z.string(),
	/** Id of the request, for questions to an administrator. */
	instance: z.string(),
	/** Every field that is wrong, by JSON pointer or document path. */
	errors: z.array(z.object({ path: z.string(), message: z.string() })).optional()
});
export type ProblemDocument = z.infer<typeof problemSchema>;
