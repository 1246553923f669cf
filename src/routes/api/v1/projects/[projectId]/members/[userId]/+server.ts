import { setMemberSchema } from '#lib/contracts/index.ts';
import { operation, readBody } from '#lib/server/api.ts';
import { database } from '#lib/server/db/client.ts';
import { removeMember, setMember } from '#lib/server/services/projects.ts';
import type { RequestHandler } from './$types';

export const PUT: RequestHandler = operation(async ({ params, request }, actor) => {
	const { role } = await readBody(request, setMemberSchema);
	await setMember(database(), actor, params.projectId, params.userId, role);
	return new Response(null, { status: 204 });
});

export const DELETE: RequestHandler = operation(async ({ params }, actor) => {
	await removeMember(database(), actor, params.projectId, params.userId);
	return new Response(null, { status: 204 });
});
