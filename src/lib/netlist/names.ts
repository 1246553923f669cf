import type { Network } from '#lib/mesh/index.ts';
import type { Floorplan } from '#lib/floorplan/index.ts';

/** Hands out names that a SPICE-syntax deck can carry, each once (names there ignore case). */
export class NameTable {
	readonly #used = new Set<string>();

	/** The name itself where it is still free, else the first of name_2, name_3, ... that is. */
	take(name: string): string {
		let free = name;
		for (let n = 2; this.#used.has(free); n++) free = `${name}_${n}`;
		this.#used.add(free);
		return free;
	}
}

/** Lower-case letters, digits and underscores in place of an id. */
export function safeId(id: string): string {
	return id.toLowerCase().replace(/[^a-z0-9]/g, '_');
}

/** Safe ids of a list, distinct within it. */
export function safeIds(items: readonly { readonly id: string }[]): string[] {
	const table = new NameTable();
	return items.map(({ id }) => table.take(safeId(id)));
}

/** A coordinate in a name: m stands for minus, which an expression would read as a difference. */
function coordinate(nm: number): string {
	return nm < 0 ? `m${-nm}` : String(nm);
}

/** Names of all nodes, n_<net>_<layer>_<x nm>_<y nm>, and comments for those that had to differ. */
export function nodeNames(
	floorplan: Floorplan,
	{ nodes, nets }: Network
): { names: string[]; comments: string[] } {
	const table = new NameTable();
	const netIds = safeIds(floorplan.nets);
	const layerIds = safeIds(floorplan.layers);
	const comments: string[] = [];
	const names = new Array<string>(nodes.count);
	for (let node = 0; node < nodes.count; node++) {
		const x = nodes.xNm[node];
		const y = nodes.yNm[node];
		const name = `n_${netIds[nodes.net[node]]}_${layerIds[nodes.layer[node]]}_${coordinate(x)}_${coordinate(y)}`;
		names[node] = table.take(name);
		if (names[node] !== name) {
			comments.push(
				`* node ${names[node]}: another node of net ${nets[nodes.net[node]].id} on layer ` +
					`${floorplan.layers[nodes.layer[node]].id} at ${x} nm, ${y} nm`
			);
		}
	}
	return { names, comments };
}
