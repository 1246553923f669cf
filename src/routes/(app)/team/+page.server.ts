import { database } from '#lib/server/db/client.ts';
import { loading, requireActor } from '#lib/server/guard.ts';
import { getTeam } from '#lib/server/services/team.ts';
import type { PageServerLoad } from './$types';

export const load: PageServerLoad = (event) => {
	const actor = requireActor(event);
	return loading(async () => ({ team: await getTeam(database(), actor) }));
};
