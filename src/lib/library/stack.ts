import type { FloorplanInput } from '#lib/floorplan/index.ts';

type LayerInput = FloorplanInput['layers'][number];
type ViaInput = NonNullable<FloorplanInput['vias']>[number];

/** Layers and vias of a process, ready to be copied into a floorplan. */
export interface RailStack {
	readonly id: string;
	readonly version: number;
	readonly name: string;
	/** The published document, and which of its columns the numbers are. */
	readonly source: string;
	readonly licence: string;
	readonly layers: readonly LayerInput[];
	readonly vias: readonly ViaInput[];
}

/** Densest square cuts per um^2 at the given cut size and space, um. */
export function cutsPerUm2(sizeUm: number, spaceUm: number): number {
	return 1 / (sizeUm + spaceUm) ** 2;
}
