import type { Network } from '#lib/mesh/index.ts';
import type { SecondThread } from '#lib/sparse/index.ts';
import type { Circuit } from './circuit.ts';
import { factorGrid, gridPattern, type FactorOutcome, type GridPattern } from './grid-factors.ts';

/** What the solves of one document share: the analysis of its pattern, and one factor per corner. */
export interface GridCache {
	readonly pattern: GridPattern;
	/** The factors of the circuit's corner, made on first use. */
	factors(circuit: Circuit): FactorOutcome;
	/** Gives the factors' memory back; later ones are made anew. */
	release(): void;
}

/**
 * Keeps analyses and factors for the modes and corners of one network.
 *
 * @param secondThread shares the work on large nets
 */
export function createGridCache(
	network: Network,
	secondThread: SecondThread | null = null
): GridCache {
	const pattern = gridPattern(network);
	const byCorner = new Map<string, FactorOutcome>();
	return {
		pattern,
		factors(circuit) {
			const kept = byCorner.get(circuit.corner.id);
			if (kept !== undefined) return kept;
			const made = factorGrid(pattern, circuit, secondThread);
			byCorner.set(circuit.corner.id, made);
			return made;
		},
		release() {
			for (const outcome of byCorner.values()) {
				if (outcome.status === 'factored') outcome.grid.release();
			}
			byCorner.clear();
		}
	};
}
