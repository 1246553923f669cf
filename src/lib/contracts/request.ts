import type { z } from 'zod';
import { problemSchema, type ProblemDocument } from './problem.ts';

/** The server answered with a problem. */
export class ApiError extends Error {
	override readonly name = 'ApiError';
	readonly problem: ProblemDocument;

	constructor(problem: ProblemDocument) {
		super(problem.detail || problem.title);
		this.problem = problem;
	}
}

export type Fetch = typeof fetch;

/** Sends a request to the API; throws an ApiError with the problem where it is refused. */
export async function request(
	fetcher: Fetch,
	method: string,
	path: string,
	body?: unknown
): Promise<Response> {
	const response = await fetcher(`/api/v1${path}`, {
		method,
		...(body === undefined
			? {}
			: { headers: { 'content-type': 'application/json' }, body: JSON.stringify(body) })
	});
	if (response.ok) return response;
	const data: unknown = await response.json().catch(() => null);
	const problem = problemSchema.safeParse(data);
	throw new ApiError(
		problem.success
			? problem.data
			: {
					type: 'about:blank',
					title: 'The server did not answer as expected',
					status: response.status,
					detail: `The server answered with status ${response.status}. Try again in a moment.`,
					instance: ''
				}
	);
}

/** The same, with the answer's JSON checked against its schema. */
export async function requestJson<T>(
	fetcher: Fetch,
	method: string,
	path: string,
	schema: z.ZodType<T>,
	body?: unknown
): Promise<T> {
	const response = await request(fetcher, method, path, body);
	return schema.parse(await response.json());
}
