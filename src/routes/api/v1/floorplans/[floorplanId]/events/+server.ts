import { requireAccess } from '#lib/server/access/access.ts';
import { operation } from '#lib/server/api.ts';
import { database } from '#lib/server/db/client.ts';
import { eventStream } from '#lib/server/events/stream.ts';
import type { RequestHandler } from './$types';

export const GET: RequestHandler = operation(async ({ params, request, locals }, actor) => {
	const subject = { kind: 'floorplan', id: params.floorplanId } as const;
	await requireAccess(database(), actor, 'project.view', subject);
	return eventStream(params.floorplanId, actor, locals.session?.id ?? '', request.signal);
});
