import { operation } from '#lib/server/api.ts';
import { database } from '#lib/server/db/client.ts';
import { floorplanFile } from '#lib/server/services/floorplans.ts';
import type { RequestHandler } from './$types';

export const GET: RequestHandler = operation(async ({ params }, actor) => {
	const { name, text } = await floorplanFile(database(), actor, params.floorplanId);
	return new Response(text, {
		headers: {
			'content-type': 'application/json; charset=utf-8',
			'content-disposition': `attachment; filename*=UTF-8''${encodeURIComponent(name)}`
		}
	});
});
