import type { RevisionDetail, Solves } from '#lib/contracts/index.ts';

/** A revision's results and jobs as the reading of a plan takes them. */
export function solvesOf({ hash, frozenAt, results }: RevisionDetail): Solves {
	return {
		documentHash: hash,
		results: results.flatMap(({ mode, corner, resultId }) =>
			resultId === null
				? []
				: [{ id: resultId, mode, corner, documentHash: hash, createdAt: frozenAt }]
		),
		jobs: results.flatMap(({ job }) => job ?? [])
	};
}
