import type { FindingStatus, RevisionState, ThreadAnchor } from '#lib/contracts/index.ts';
import type { ItemList } from '#lib/floorplan/index.ts';

/** How each state is said, and the sign that shows it without colour. */
export const STATE_WORDS: Readonly<Record<RevisionState, { label: string; sign: string }>> = {
	frozen: { label: 'Frozen', sign: '◇' },
	'in-review': { label: 'In review', sign: '◐' },
	returned: { label: 'Returned', sign: '↩' },
	approved: { label: 'Approved', sign: '✓' },
	'signed-off': { label: 'Signed off', sign: '✓✓' },
	superseded: { label: 'Superseded', sign: '–' }
};

export const STATUS_WORDS: Readonly<Record<FindingStatus, string>> = {
	new: 'New',
	'still-there': 'Still there',
	'come-back': 'Come back',
	gone: 'Gone'
};

const LIST_WORDS: Partial<Readonly<Record<ItemList, string>>> = {
	regulators: 'regulator',
	blocks: 'block',
	feeds: 'bump',
	straps: 'straps',
	keepouts: 'keep-out',
	nets: 'net',
	layers: 'layer',
	vias: 'via rule',
	cells: 'cell',
	modes: 'mode',
	corners: 'corner'
};

/** An object of the plan in words: "regulator core_2_4". */
export function objectWords({ list, id }: { list: ItemList; id: string }): string {
	return `${LIST_WORDS[list] ?? list} ${id}`;
}

/** What a thread is about, in words. */
export function anchorWords(anchor: ThreadAnchor): string {
	switch (anchor.kind) {
		case 'item':
			return objectWords(anchor) + (anchor.isPresent ? '' : ' (deleted)');
		case 'place': {
			const [x, y] = anchor.atUm.map((um) => Math.round(um));
			return `place ${x}, ${y} µm`;
		}
		case 'plan':
			return 'the whole plan';
	}
}
