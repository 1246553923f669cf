import { eq } from 'drizzle-orm';
import type { FloorplanDetail, FloorplanSummary } from '#lib/contracts/index.ts';
import {
	floorplanSchema,
	formatProblems,
	hashFloorplan,
	parseFloorplan,
	writeFloorplan,
	type Floorplan
} from '#lib/floorplan/index.ts';
import { sg13g2 } from '#lib/library/index.ts';
import { requireAccess } from '../access/access.ts';
import { audit, type Actor } from '../audit.ts';
import type { Database, Handle } from '../db/client.ts';
import { floorplans, projects, users } from '../db/schema/index.ts';
import { Problem } from '../problem.ts';
import { summariseFloorplans } from './projects.ts';

/** Side of the die of an empty floorplan, um. */
const EMPTY_DIE_UM = 2000;

/** A floorplan to begin with: a square die on an open stack, the usual three kinds of net, no metal. */
function emptyFloorplan(name: string): Floorplan {
	return floorplanSchema.parse({
		format: 'manyweir-floorplan',
		version: 1,
		name,
		die: {
			outline: [
				[0, 0],
				[EMPTY_DIE_UM, 0],
				[EMPTY_DIE_UM, EMPTY_DIE_UM],
				[0, EMPTY_DIE_UM]
			]
		},
		sites: { originUm: [0, 0], pitchUm: [5, 5] },
		stack: { id: sg13g2.id, version: sg13g2.version, name: sg13g2.name, source: sg13g2.source },
		layers: sg13g2.layers,
		vias: sg13g2.vias,
		nets: [
			{ id: 'vin', name: 'Input rail', kind: 'input', volts: 1.5 },
			{ id: 'vdd', name: 'Regulated rail', kind: 'regulated', volts: 1.2 },
			{ id: 'gnd', name: 'Ground', kind: 'ground', volts: 0 }
		],
		straps: [],
		limits: { dropV: 0.06 }
	});
}

function parseDocument(document: unknown): Floorplan {
	const parsed = parseFloorplan(document);
	if (parsed.status === 'parsed') return parsed.floorplan;
	throw new Problem(
		'invalid',
		`The file is not a floorplan: ${formatProblems(parsed.problems)[0]}`,
		{
			errors: parsed.problems.slice(0, 100)
		}
	);
}

/** Adds a floorplan to a project: the document of a file, or an empty one. */
export async function createFloorplan(
	db: Database,
	actor: Actor,
	projectId: string,
	name: string,
	document?: unknown
): Promise<FloorplanSummary> {
	await requireAccess(db, actor, 'floorplan.create', { kind: 'project', id: projectId });
	const floorplan =
		document === undefined ? emptyFloorplan(name) : { ...parseDocument(document), name };
	const id = await db.transaction((tx) => insertFloorplan(tx, actor, projectId, floorplan));
	const summaries = await summariseFloorplans(db, [projectId]);
	const created = summaries.find((summary) => summary.id === id);
	if (!created) throw new Error(`floorplan ${id} is gone`);
	return created;
}

/**
 * Stores a parsed document as a new floorplan of a project.
 *
 * @param at when it happened
 */
export async function insertFloorplan(
	db: Handle,
	actor: Actor,
	projectId: string,
	document: Floorplan,
	at = new Date()
): Promise<string> {
	const name = document.name ?? 'Untitled';
	const [row] = await db
		.insert(floorplans)
		.values({
			projectId,
			name,
			hash: hashFloorplan(document),
			document,
			createdBy: actor.userId,
			createdAt: at,
			updatedBy: actor.userId,
			updatedAt: at
		})
		.returning({ id: floorplans.id });
	await audit(db, {
		teamId: actor.teamId,
		userId: actor.userId,
		requestId: actor.requestId,
		action: 'floorplan.create',
		objectKind: 'floorplan',
		objectId: row.id,
		detail: { name }
	});
	return row.id;
}

export async function getFloorplan(db: Handle, actor: Actor, id: string): Promise<FloorplanDetail> {
	const access = await requireAccess(db, actor, 'project.view', { kind: 'floorplan', id });
	const [row] = await db
		.select({ floorplan: floorplans, projectName: projects.name, updatedBy: users.name })
		.from(floorplans)
		.innerJoin(projects, eq(projects.id, floorplans.projectId))
		.innerJoin(users, eq(users.id, floorplans.updatedBy))
		.where(eq(floorplans.id, id));
	const { floorplan, projectName, updatedBy } = row;
	return {
		id,
		projectId: floorplan.projectId,
		projectName,
		name: floorplan.name,
		version: floorplan.version,
		hash: floorplan.hash,
		document: floorplan.document,
		role: access.role ?? null,
		updatedAt: floorplan.updatedAt.toISOString(),
		updatedBy
	};
}

/** The document as a file for people, with a name for it. */
export async function floorplanFile(
	db: Handle,
	actor: Actor,
	id: string
): Promise<{ name: string; text: string }> {
	const { name, document } = await getFloorplan(db, actor, id);
	return { name: `${name}.manyweir.json`, text: writeFloorplan(document) };
}
