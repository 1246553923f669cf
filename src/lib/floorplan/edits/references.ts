import type { Floorplan, ItemList } from '../document.ts';
import type { Problem } from '../problems.ts';
import { describeItems, type ItemReference } from './actions.ts';

/** An item or the limits that name another item. */
export interface Referrer {
	/** Null stands for the limits' overrides. */
	readonly from: ItemReference | null;
	readonly to: ItemReference;
}

/** How many referrers a message names before it counts the rest. */
const MOST_NAMED = 5;

/** Every reference of a document from one item to another. */
function* referencesOf(floorplan: Floorplan): Generator<Referrer> {
	const { vias, straps, feeds, regulators, blocks, keepouts, modes, limits } = floorplan;
	const link = (list: ItemList, id: string, toList: ItemList, toId: string): Referrer => ({
		from: { list, id },
		to: { list: toList, id: toId }
	});
	for (const { id, lower, upper } of vias) {
		yield link('vias', id, 'layers', lower);
		yield link('vias', id, 'layers', upper);
	}
	for (const { id, net, layer } of straps) {
		yield link('straps', id, 'nets', net);
		yield link('straps', id, 'layers', layer);
	}
	for (const { id, net, layer } of feeds) {
		yield link('feeds', id, 'nets', net);
		if (layer !== undefined) yield link('feeds', id, 'layers', layer);
	}
	for (const { id, cell, input, output } of regulators) {
		yield link('regulators', id, 'cells', cell);
		yield link('regulators', id, 'nets', output);
		if (input !== null) yield link('regulators', id, 'nets', input);
	}
	for (const { id, net, amps } of blocks) {
		yield link('blocks', id, 'nets', net);
		for (const mode of Object.keys(amps)) yield link('blocks', id, 'modes', mode);
	}
	for (const { id, layers } of keepouts) {
		for (const layer of layers ?? []) yield link('keepouts', id, 'layers', layer);
	}
	for (const { id, inputVolts } of modes) {
		for (const net of Object.keys(inputVolts ?? {})) yield link('modes', id, 'nets', net);
	}
	for (const id of Object.keys(limits.overrides?.nets ?? {})) {
		yield { from: null, to: { list: 'nets', id } };
	}
	for (const id of Object.keys(limits.overrides?.blocks ?? {})) {
		yield { from: null, to: { list: 'blocks', id } };
	}
}

/** Who names the given items, each once; items that are themselves among the given do not count. */
export function referrersOf(
	floorplan: Floorplan,
	references: readonly ItemReference[]
): Referrer[] {
	const key = ({ list, id }: ItemReference) => `${list} ${id}`;
	const given = new Set(references.map(key));
	const found = new Map<string, Referrer>();
	for (const referrer of referencesOf(floorplan)) {
		const { from, to } = referrer;
		if (!given.has(key(to)) || (from && given.has(key(from)))) continue;
		found.set(`${key(to)} ${from ? key(from) : ''}`, referrer);
	}
	return [...found.values()];
}

/** A problem for each of the items that something still names, which says what. */
export function referenceProblems(
	floorplan: Floorplan,
	removed: readonly ItemReference[]
): Problem[] {
	const byItem = new Map<string, Referrer[]>();
	for (const referrer of referrersOf(floorplan, removed)) {
		const path = `${referrer.to.list} (${referrer.to.id})`;
		byItem.set(path, [...(byItem.get(path) ?? []), referrer]);
	}
	return [...byItem].map(([path, referrers]) => {
		const names = referrers
			.slice(0, MOST_NAMED)
			.map(({ from }) => (from ? describeItems([from]) : 'the limits'));
		const rest = referrers.length - names.length;
		if (rest > 0) names.push(`${rest} more`);
		return {
			path,
			message: `is used by ${names.join(', ')} (expected to change or remove what uses it first)`
		};
	});
}
