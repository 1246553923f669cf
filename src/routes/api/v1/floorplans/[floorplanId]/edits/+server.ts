import { json } from '@sveltejs/kit';
import { z } from 'zod';
import { submitEditSchema } from '#lib/contracts/index.ts';
import { operation, PLAN_BODY_BYTES, readBody } from '#lib/server/api.ts';
import { database } from '#lib/server/db/client.ts';
import { Problem } from '#lib/server/problem.ts';
import { listEdits, submitEdit } from '#lib/server/services/edits.ts';
import type { RequestHandler } from './$types';

const afterSchema = z.coerce.number().int().nonnegative();

export const GET: RequestHandler = operation(async ({ params, url }, actor) => {
	const after = afterSchema.safeParse(url.searchParams.get('after') ?? 0);
	if (!after.success) throw new Problem('invalid', 'after: expected a version, 0 or more.');
	return json(await listEdits(database(), actor, params.floorplanId, after.data));
});

export const POST: RequestHandler = operation(async ({ params, request }, actor) => {
	const edit = await readBody(request, submitEditSchema, PLAN_BODY_BYTES);
	return json(await submitEdit(database(), actor, params.floorplanId, edit));
});
