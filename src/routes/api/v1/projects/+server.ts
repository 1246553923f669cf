import { json } from '@sveltejs/kit';
import { createProjectSchema } from '#lib/contracts/index.ts';
import { operation, readBody } from '#lib/server/api.ts';
import { database } from '#lib/server/db/client.ts';
import { createProject, listProjects } from '#lib/server/services/projects.ts';
import type { RequestHandler } from './$types';

export const GET: RequestHandler = operation(async (_event, actor) =>
	json({ projects: await listProjects(database(), actor) })
);

export const POST: RequestHandler = operation(async ({ request }, actor) => {
	const { name } = await readBody(request, createProjectSchema);
	const project = await createProject(database(), actor, name);
	return json(project, { status: 201, headers: { location: `/api/v1/projects/${project.id}` } });
});
