import type { ProblemDocument } from '#lib/contracts/index.ts';

/** Kinds of expected failure, with what each is to the person and to HTTP. */
const KINDS = {
	'not-signed-in': { status: 401, title: 'Sign in first' },
	forbidden: { status: 403, title: 'Your role does not allow this' },
	'not-found': { status: 404, title: 'There is no such thing here' },
	conflict: { status: 409, title: 'Somebody else was faster' },
	blocked: { status: 409, title: 'Something stands against it' },
	'too-large': { status: 413, title: 'Too large' },
	invalid: { status: 422, title: 'Something in the request is not right' },
	'too-many': { status: 429, title: 'Too many at once' },
	unavailable: { status: 503, title: 'Not available at the moment' }
} as const;

export type ProblemKind = keyof typeof KINDS;

interface ProblemOptions {
	readonly errors?: readonly { readonly path: string; readonly message: string }[];
	/** Further members of the problem document. */
	readonly members?: Readonly<Record<string, unknown>>;
	/** Seconds after which trying again makes sense. */
	readonly retryAfterSeconds?: number;
}

/** An expected failure of a service: what it is, and a sentence for the person who caused it. */
export class Problem extends Error {
	override readonly name = 'Problem';
	readonly kind: ProblemKind;
	readonly options: ProblemOptions;

	constructor(kind: ProblemKind, detail: string, options: ProblemOptions = {}) {
		super(detail);
		this.kind = kind;
		this.options = options;
	}

	get status(): number {
		return KINDS[this.kind].status;
	}
}

/** A problem as RFC 9457 writes it. */
export function problemDocument(problem: Problem, requestId: string): ProblemDocument {
	const { status, title } = KINDS[problem.kind];
	return {
		type: `/problems/${problem.kind}`,
		title,
		status,
		detail: problem.message,
		instance: requestId,
		...(problem.options.errors ? { errors: [...problem.options.errors] } : {}),
		...problem.options.members
	};
}

export function problemResponse(problem: Problem, requestId: string): Response {
	const headers = new Headers({ 'content-type': 'application/problem+json' });
	if (problem.options.retryAfterSeconds !== undefined) {
		headers.set('retry-after', String(Math.ceil(problem.options.retryAfterSeconds)));
	}
	return new Response(JSON.stringify(problemDocument(problem, requestId)), {
		status: problem.status,
		headers
	});
}
