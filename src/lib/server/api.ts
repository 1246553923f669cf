import type { RequestEvent } from '@sveltejs/kit';
import type { z } from 'zod';
import type { Actor } from './audit.ts';
import { answering } from './hooks/problems.ts';
import { Problem } from './problem.ts';

/** Bodies of ordinary requests, and of those that carry a floorplan, bytes. */
export const SMALL_BODY_BYTES = 64 * 1024;
export const PLAN_BODY_BYTES = 16 * 1024 * 1024;

/** Handles an operation of the API for whoever is signed in: problems become problem documents. */
export function operation<Event extends RequestEvent>(
	work: (event: Event, actor: Actor) => Promise<Response>
): (event: Event) => Promise<Response> {
	return (event) =>
		answering(event.locals.requestId, () => {
			const { actor, unavailable } = event.locals;
			if (unavailable) throw unavailable;
			if (!actor) throw new Problem('not-signed-in', 'Sign in to use this address.');
			return work(event, actor);
		});
}

/** Reads a body up to a size, whatever length its header claims. */
async function readText(request: Request, limitBytes: number): Promise<string> {
	const tooLarge = () =>
		new Problem(
			'too-large',
			`The request is larger than the ${Math.round(limitBytes / 1024)} KiB allowed here.`
		);
	if (Number(request.headers.get('content-length') ?? 0) > limitBytes) throw tooLarge();
	const decoder = new TextDecoder('utf-8', { fatal: true });
	const reader = request.body?.getReader();
	let text = '';
	let bytes = 0;
	try {
		for (let chunk = await reader?.read(); chunk && !chunk.done; chunk = await reader?.read()) {
			bytes += (chunk.value as Uint8Array).byteLength;
			if (bytes > limitBytes) throw tooLarge();
			text += decoder.decode(chunk.value as Uint8Array, { stream: true });
		}
		return text + decoder.decode();
	} catch (error) {
		if (error instanceof TypeError) throw new Problem('invalid', 'The body is not UTF-8 text.');
		throw error;
	}
}

/** The JSON body of a request, checked against its schema. */
export async function readBody<T>(
	request: Request,
	schema: z.ZodType<T>,
	limitBytes = SMALL_BODY_BYTES
): Promise<T> {
	if (!/^application\/json\b/i.test(request.headers.get('content-type') ?? '')) {
		throw new Problem('invalid', 'Send the body as application/json.');
	}
	let data: unknown;
	const text = await readText(request, limitBytes);
	try {
		data = JSON.parse(text);
	} catch {
		throw new Problem('invalid', 'The body is not JSON.');
	}
	const parsed = schema.safeParse(data);
	if (parsed.success) return parsed.data;
	const errors = parsed.error.issues.slice(0, 100).map(({ path, message }) => ({
		path: path.map(String).join('.'),
		message
	}));
	throw new Problem('invalid', `${errors[0].path || 'body'}: ${errors[0].message}`, { errors });
}
