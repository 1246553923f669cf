import { and, eq } from 'drizzle-orm';
import { z } from 'zod';
import { SOLVER_VERSION } from '#lib/solver/index.ts';
import type { ResultFile } from '#lib/results/index.ts';
import type { Handle } from '../db/client.ts';
import { documents, resultMaps, results, type ResultFigures } from '../db/schema/index.ts';
import { publish } from '../events/publish.ts';
import { bindResults } from './bind-results.ts';
import { JobRefused, type JobKind } from './job-kind.ts';
import type { SolveAnswer } from './solve-messages.ts';
import type { SolveRunner } from './solve-runner.ts';

export const SOLVE_KIND = 'solve';

export const solveInputSchema = z.object({
	projectId: z.uuid(),
	floorplanId: z.uuid(),
	documentHash: z.string(),
	mode: z.string(),
	corner: z.string()
});
export type SolveInput = z.infer<typeof solveInputSchema>;

/** Two requests of the same solve are one piece of work. */
export function solveDedupeKey({ floorplanId, documentHash, mode, corner }: SolveInput): string {
	return [SOLVE_KIND, floorplanId, documentHash, mode, corner, SOLVER_VERSION].join(':');
}

/** What overviews show of a result. */
export function figuresOf(file: ResultFile): ResultFigures {
	const margins = [...file.blocks, ...file.spots].flatMap(({ marginV }) =>
		marginV === null ? [] : [marginV]
	);
	const drops = file.nets
		.filter(({ kind }) => kind === 'regulated')
		.map(({ worstDropV }) => worstDropV);
	return {
		worstDropV: Math.max(0, ...drops),
		worstMarginV: margins.length > 0 ? Math.min(...margins) : null,
		findings: file.findings.length
	};
}

/** Solves the document that was asked for in one mode and corner, and keeps the result. */
export function solveKind(runner: SolveRunner): JobKind<SolveInput, SolveAnswer> {
	return {
		kind: SOLVE_KIND,
		input: solveInputSchema,
		async run(input, { db, signal, progress }) {
			const { projectId, documentHash, mode, corner } = input;
			const [row] = await db
				.select({ document: documents.document })
				.from(documents)
				.where(and(eq(documents.projectId, projectId), eq(documents.hash, documentHash)));
			if (!row) {
				throw new JobRefused({
					message: 'The document to solve is no longer kept. Solve again.',
					problems: []
				});
			}
			return runner.run({ floorplan: row.document, documentHash, mode, corner }, signal, progress);
		},
		store: keepResult
	};
}

/** Keeps what a solve found, binds it to the revisions that wait for it, and tells pages. */
export async function keepResult(
	db: Handle,
	input: SolveInput,
	{ file, maps }: SolveAnswer
): Promise<void> {
	const { projectId, floorplanId, documentHash, mode, corner } = input;
	const [created] = await db
		.insert(results)
		.values({
			projectId,
			documentHash,
			mode,
			corner,
			solverVersion: SOLVER_VERSION,
			file,
			figures: figuresOf(file)
		})
		.onConflictDoNothing()
		.returning({ id: results.id });
	if (created) {
		await db
			.insert(resultMaps)
			.values(maps.map(({ net, gzip }) => ({ resultId: created.id, net, gzip })));
	}
	await bindResults(db, projectId, documentHash);
	// Kept already by another floorplan of the same content: the numbers are the same.
	const id = created?.id ?? (await findResult(db, input))?.id;
	if (id) await publish(db, { type: 'result', floorplanId, id, mode, corner, documentHash });
}

/** The kept result of a document in a mode and corner. */
async function findResult(
	db: Handle,
	{ projectId, documentHash, mode, corner }: SolveInput
): Promise<{ id: string } | undefined> {
	const [row] = await db
		.select({ id: results.id })
		.from(results)
		.where(
			and(
				eq(results.projectId, projectId),
				eq(results.documentHash, documentHash),
				eq(results.mode, mode),
				eq(results.corner, corner),
				eq(results.solverVersion, SOLVER_VERSION)
			)
		);
	return row;
}
