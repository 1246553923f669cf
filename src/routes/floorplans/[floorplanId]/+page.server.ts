import { database } from '#lib/server/db/client.ts';
import { loading, requireActor } from '#lib/server/guard.ts';
import { getFloorplan } from '#lib/server/services/floorplans.ts';
import { getSignedIn } from '#lib/server/services/team.ts';
import type { PageServerLoad } from './$types';

export const load: PageServerLoad = (event) => {
	const actor = requireActor(event);
	return loading(async () => ({
		...(await getSignedIn(database(), actor)),
		floorplan: await getFloorplan(database(), actor, event.params.floorplanId)
	}));
};
