import { and, asc, desc, eq, gt } from 'drizzle-orm';
import type { EditAccepted, EditConflict, EditsPage, SubmitEdit } from '#lib/contracts/index.ts';
import { hashFloorplan } from '#lib/floorplan/index.ts';
import {
	applyOperations,
	partsTouched,
	type Conflict,
	type Operation
} from '#lib/floorplan/edits/index.ts';
import { requireAccess } from '../access/access.ts';
import type { Actor } from '../audit.ts';
import type { Handle } from '../db/client.ts';
import { floorplanEdits, floorplans, users } from '../db/schema/index.ts';
import { publish } from '../events/publish.ts';
import { Problem } from '../problem.ts';
import { keepPlaces } from './threads.ts';

/** Edits that one page of the history holds. */
const PAGE_SIZE = 200;
/** Edits searched for whoever changed what is in conflict. */
const SEARCHED_EDITS = 500;

/** Parts of a document that an analyst may change; everything else is drawing. */
const LOAD_PARTS = new Set<string>(['blocks', 'modes', 'corners', 'limits']);

/** Asks for the right to everything that an edit touches. */
async function requireEdit(
	db: Handle,
	actor: Actor,
	id: string,
	operations: readonly Operation[]
): Promise<void> {
	const parts = [...partsTouched(operations)];
	const isDrawing = parts.some((part) => !LOAD_PARTS.has(part));
	await requireAccess(db, actor, isDrawing ? 'floorplan.draw' : 'floorplan.loads', {
		kind: 'floorplan',
		id
	});
}

/**
 * Applies an edit to the document as it stands now. Takes effect exactly once: an edit that was
 * accepted before answers as it did then. Edits of different things merge; where somebody else has
 * changed the same thing since, the answer is a conflict with both values, and nothing is changed.
 *
 * @param at when it happened
 */
export async function submitEdit(
	db: Handle,
	actor: Actor,
	id: string,
	edit: SubmitEdit,
	at = new Date()
): Promise<EditAccepted> {
	await requireEdit(db, actor, id, edit.operations);
	return db.transaction(async (tx) => {
		const [row] = await tx.select().from(floorplans).where(eq(floorplans.id, id)).for('update');
		const [known] = await tx
			.select({
				version: floorplanEdits.toVersion,
				hash: floorplanEdits.toHash,
				userId: floorplanEdits.userId
			})
			.from(floorplanEdits)
			.where(and(eq(floorplanEdits.floorplanId, id), eq(floorplanEdits.editId, edit.id)));
		if (known?.userId === actor.userId) return { version: known.version, hash: known.hash };
		if (known) {
			throw new Problem('invalid', 'id: another edit has this id (expected a new random UUID).');
		}
		if (edit.baseVersion > row.version) {
			throw new Problem(
				'invalid',
				`Version ${edit.baseVersion} does not exist yet (newest is ${row.version}). Reload the page.`
			);
		}
		const result = applyOperations(row.document, edit.operations);
		if (result.status === 'refused') {
			throw new Problem('invalid', `${result.problems[0].path}: ${result.problems[0].message}`, {
				errors: result.problems.slice(0, 100)
			});
		}
		if (result.status === 'conflict') {
			const conflicts = await nameAuthors(tx, id, edit.baseVersion, result.conflicts);
			throw new Problem('conflict', 'Somebody else has changed the same thing meanwhile.', {
				members: { conflicts, version: row.version }
			});
		}
		const version = row.version + 1;
		const hash = hashFloorplan(result.floorplan);
		await tx
			.update(floorplans)
			.set({
				version,
				hash,
				document: result.floorplan,
				name: result.floorplan.name ?? 'Untitled',
				updatedBy: actor.userId,
				updatedAt: at
			})
			.where(eq(floorplans.id, id));
		await tx.insert(floorplanEdits).values({
			floorplanId: id,
			editId: edit.id,
			label: edit.label,
			operations: edit.operations,
			baseVersion: edit.baseVersion,
			toVersion: version,
			toHash: hash,
			userId: actor.userId,
			at
		});
		await keepPlaces(tx, id, row.document, edit.operations);
		await publish(tx, { type: 'edit', floorplanId: id, version, by: actor.name, editId: edit.id });
		return { version, hash };
	});
}

function touches(operation: Operation, { list, id, property }: Conflict): boolean {
	if (operation.op === 'set') return property === operation.property;
	const touchedId = operation.op === 'change' ? operation.id : operation.item.id;
	return operation.list === list && touchedId === id;
}

/** Says of each conflict who last touched the thing since the version that the author saw. */
async function nameAuthors(
	db: Handle,
	floorplanId: string,
	baseVersion: number,
	conflicts: readonly Conflict[]
): Promise<EditConflict[]> {
	const since = await db
		.select({ operations: floorplanEdits.operations, at: floorplanEdits.at, by: users.name })
		.from(floorplanEdits)
		.innerJoin(users, eq(users.id, floorplanEdits.userId))
		.where(
			and(eq(floorplanEdits.floorplanId, floorplanId), gt(floorplanEdits.toVersion, baseVersion))
		)
		.orderBy(desc(floorplanEdits.toVersion))
		.limit(SEARCHED_EDITS);
	return conflicts.map((conflict) => {
		const last = since.find(({ operations }) =>
			operations.some((operation) => touches(operation, conflict))
		);
		return { ...conflict, by: last?.by ?? null, at: last?.at.toISOString() ?? null };
	});
}

/** The edits after a version, in order. */
export async function listEdits(
	db: Handle,
	actor: Actor,
	id: string,
	after: number
): Promise<EditsPage> {
	await requireAccess(db, actor, 'project.view', { kind: 'floorplan', id });
	const rows = await db
		.select({ edit: floorplanEdits, by: users.name })
		.from(floorplanEdits)
		.innerJoin(users, eq(users.id, floorplanEdits.userId))
		.where(and(eq(floorplanEdits.floorplanId, id), gt(floorplanEdits.toVersion, after)))
		.orderBy(asc(floorplanEdits.toVersion))
		.limit(PAGE_SIZE + 1);
	const page = rows.slice(0, PAGE_SIZE);
	return {
		edits: page.map(({ edit, by }) => ({
			id: edit.editId,
			label: edit.label,
			operations: edit.operations,
			version: edit.toVersion,
			by,
			userId: edit.userId,
			at: edit.at.toISOString()
		})),
		version: page.at(-1)?.edit.toVersion ?? after,
		hasMore: rows.length > PAGE_SIZE
	};
}
