import { and, eq } from 'drizzle-orm';
import { may, type Action, type Standing } from '#lib/contracts/index.ts';
import { audit, type Actor } from '../audit.ts';
import type { Handle } from '../db/client.ts';
import {
	floorplans,
	jobs,
	projectMembers,
	projects,
	results,
	revisions,
	threads
} from '../db/schema/index.ts';
import { Problem } from '../problem.ts';

/** Objects that permissions are asked about. All but the team itself belong to a project. */
export type Subject =
	| { readonly kind: 'team' }
	| {
			readonly kind: 'project' | 'floorplan' | 'job' | 'result' | 'revision' | 'thread';
			readonly id: string;
	  };

/** The project that an object belongs to and how the actor stands towards it. */
export interface Access extends Standing {
	readonly projectId: string | null;
}

const UUID = /^[0-9a-f]{8}-(?:[0-9a-f]{4}-){3}[0-9a-f]{12}$/i;

function projectOf(db: Handle, subject: Exclude<Subject, { kind: 'team' }>) {
	switch (subject.kind) {
		case 'project':
			return db
				.select({ projectId: projects.id })
				.from(projects)
				.where(eq(projects.id, subject.id));
		case 'floorplan':
			return db
				.select({ projectId: floorplans.projectId })
				.from(floorplans)
				.where(eq(floorplans.id, subject.id));
		case 'job':
			return db
				.select({ projectId: floorplans.projectId })
				.from(jobs)
				.innerJoin(floorplans, eq(floorplans.id, jobs.floorplanId))
				.where(eq(jobs.id, subject.id));
		case 'result':
			return db
				.select({ projectId: results.projectId })
				.from(results)
				.where(eq(results.id, subject.id));
		case 'revision':
			return db
				.select({ projectId: floorplans.projectId })
				.from(revisions)
				.innerJoin(floorplans, eq(floorplans.id, revisions.floorplanId))
				.where(eq(revisions.id, subject.id));
		case 'thread':
			return db
				.select({ projectId: floorplans.projectId })
				.from(threads)
				.innerJoin(floorplans, eq(floorplans.id, threads.floorplanId))
				.where(eq(threads.id, subject.id));
	}
}

/** How the actor stands to the object, or null where for them it does not exist. */
async function standing(db: Handle, actor: Actor, subject: Subject): Promise<Access | null> {
	if (subject.kind === 'team') return { projectId: null, isTeamAdmin: actor.isTeamAdmin };
	if (!UUID.test(subject.id)) return null;
	const [found] = await projectOf(db, subject);
	if (!found) return null;
	const [row] = await db
		.select({ role: projectMembers.role })
		.from(projects)
		.leftJoin(
			projectMembers,
			and(eq(projectMembers.projectId, projects.id), eq(projectMembers.userId, actor.userId))
		)
		.where(and(eq(projects.id, found.projectId), eq(projects.teamId, actor.teamId)));
	if (!row) return null;
	const access = {
		projectId: found.projectId,
		role: row.role ?? undefined,
		isTeamAdmin: actor.isTeamAdmin
	};
	return may(access, 'project.view') ? access : null;
}

/**
 * The one place that decides. Returns how the actor stands to the object, or throws: 404 for what
 * belongs to another team or project, 403 where the role does not allow the action.
 */
export async function requireAccess(
	db: Handle,
	actor: Actor,
	action: Action,
	subject: Subject
): Promise<Access> {
	const access = await standing(db, actor, subject);
	if (!access)
		throw new Problem('not-found', `There is no such ${subject.kind}, or it is not yours to see.`);
	if (!may(access, action)) {
		await audit(db, {
			teamId: actor.teamId,
			userId: actor.userId,
			requestId: actor.requestId,
			action,
			objectKind: subject.kind,
			objectId: subject.kind === 'team' ? actor.teamId : subject.id,
			outcome: 'refused'
		});
		const role = access.role ?? (access.isTeamAdmin ? 'team admin' : 'member');
		throw new Problem(
			'forbidden',
			`As ${role} you may not do this (${action}). Ask a lead of the project.`
		);
	}
	return access;
}
