import { eq } from 'drizzle-orm';
import { z } from 'zod';
import { SOLVER_VERSION } from '#lib/solver/index.ts';
import type { ResultFile } from '#lib/results/index.ts';
import type { Handle } from '../db/client.ts';
import { floorplans, resultMaps, results, type ResultFigures } from '../db/schema/index.ts';
import { publish } from '../events/publish.ts';
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
export function solveDedupeKey({ projectId, documentHash, mode, corner }: SolveInput): string {
	return [SOLVE_KIND, projectId, documentHash, mode, corner, SOLVER_VERSION].join(':');
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

/** Solves the floorplan as it stands in one mode and corner, and keeps the result. */
export function solveKind(runner: SolveRunner): JobKind<SolveInput, SolveAnswer> {
	return {
		kind: SOLVE_KIND,
		input: solveInputSchema,
		async run(input, { db, signal, progress }) {
			const [row] = await db
				.select({ hash: floorplans.hash, document: floorplans.document })
				.from(floorplans)
				.where(eq(floorplans.id, input.floorplanId));
			if (!row || row.hash !== input.documentHash) {
				throw new JobRefused({
					message: 'The floorplan was edited before its turn came. Solve again.',
					problems: []
				});
			}
			const { documentHash, mode, corner } = input;
			return runner.run({ floorplan: row.document, documentHash, mode, corner }, signal, progress);
		},
		store: storeResult
	};
}

async function storeResult(
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
	// Kept already: the same document gives the same numbers.
	if (!created) return;
	await db
		.insert(resultMaps)
		.values(maps.map(({ net, gzip }) => ({ resultId: created.id, net, gzip })));
	await publish(db, { type: 'result', floorplanId, id: created.id, mode, corner, documentHash });
}
