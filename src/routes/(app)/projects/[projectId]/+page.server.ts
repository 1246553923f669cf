import { database } from '#lib/server/db/client.ts';
import { loading, requireActor } from '#lib/server/guard.ts';
import { getProject } from '#lib/server/services/projects.ts';
import { getTeam } from '#lib/server/services/team.ts';
import type { PageServerLoad } from './$types';

export const load: PageServerLoad = async (event) => {
	const actor = requireActor(event);
	event.depends('manyweir:project');
	return loading(async () => ({
		project: await getProject(database(), actor, event.params.projectId),
		people: (await getTeam(database(), actor)).people,
		isTeamAdmin: actor.isTeamAdmin
	}));
};
