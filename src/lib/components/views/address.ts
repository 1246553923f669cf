import { ITEM_LISTS, type ItemList } from '#lib/floorplan/index.ts';
import type { ItemReference } from '#lib/floorplan/edits/index.ts';

/** More selected items than this do not fit into an address. */
const MOST_SELECTED = 20;

interface Address {
	readonly mode: string | null;
	readonly corner: string | null;
	readonly net: string | null;
	readonly selected: readonly ItemReference[];
}

function isItemList(text: string): text is ItemList {
	return (ITEM_LISTS as readonly string[]).includes(text);
}

/** What an address asks to see; what is not there or makes no sense is left out. */
export function choiceOf({ searchParams }: URL): Address {
	return {
		mode: searchParams.get('mode'),
		corner: searchParams.get('corner'),
		net: searchParams.get('net'),
		selected: searchParams.getAll('select').flatMap((text) => {
			const [list, id] = text.split(':', 2);
			return id && isItemList(list) ? [{ list, id }] : [];
		})
	};
}

/** The address with what is looked at in it. */
export function addressOf(url: URL, { mode, corner, net, selected }: Address): URL {
	const next = new URL(url);
	for (const [key, value] of Object.entries({ mode, corner, net })) {
		if (value === null) next.searchParams.delete(key);
		else next.searchParams.set(key, value);
	}
	next.searchParams.delete('select');
	if (selected.length <= MOST_SELECTED) {
		for (const { list, id } of selected) next.searchParams.append('select', `${list}:${id}`);
	}
	return next;
}
