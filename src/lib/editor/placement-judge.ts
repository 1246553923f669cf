import type { Floorplan, Regulator } from '#lib/floorplan/index.ts';
import type { ItemReference } from '#lib/floorplan/edits/index.ts';
import {
	buildPlacementIndex,
	checkPlacement,
	type PlacementIndex,
	type PlacementReason
} from '#lib/floorplan/legality/index.ts';

/** Says what speaks against places of regulators in one document; its index is made when first asked. */
export class PlacementJudge {
	readonly #floorplan: Floorplan;
	#index: PlacementIndex | null = null;
	#problems: ReadonlyMap<string, readonly PlacementReason[]> | null = null;

	constructor(floorplan: Floorplan) {
		this.#floorplan = floorplan;
	}

	/** Reasons against a place of a regulator; units that move along do not count. */
	reasonsAgainst(regulator: Regulator, movingAlong?: ReadonlySet<string>): PlacementReason[] {
		this.#index ??= buildPlacementIndex(this.#floorplan);
		return checkPlacement(this.#index, regulator, movingAlong);
	}

	/** Reasons against moving regulators by a distance, by id. */
	reasonsAfterMove(
		references: readonly ItemReference[],
		dxUm: number,
		dyUm: number
	): Map<string, PlacementReason[]> {
		const moving = new Set(
			references.filter(({ list }) => list === 'regulators').map(({ id }) => id)
		);
		return this.#collect(
			this.#floorplan.regulators
				.filter(({ id }) => moving.has(id))
				.map((one) => ({ ...one, xUm: one.xUm + dxUm, yUm: one.yUm + dyUm })),
			moving
		);
	}

	/** Reasons against the regulators that stand illegally, by id, in document order. */
	get problems(): ReadonlyMap<string, readonly PlacementReason[]> {
		this.#problems ??= this.#collect(this.#floorplan.regulators);
		return this.#problems;
	}

	#collect(
		regulators: readonly Regulator[],
		movingAlong?: ReadonlySet<string>
	): Map<string, PlacementReason[]> {
		return new Map(
			regulators
				.map((one) => [one.id, this.reasonsAgainst(one, movingAlong)] as const)
				.filter(([, reasons]) => reasons.length > 0)
		);
	}
}
