import { expect, it } from 'vitest';
import { addressOf, choiceOf } from './address.ts';

const address = (search: string) => new URL(`https://weir.example/floorplans/1${search}`);

it('what is looked at comes back from the address', () => {
	const choice = {
		mode: 'burst',
		corner: 'hot',
		net: '*',
		selected: [
			{ list: 'regulators', id: 'R[0]/1' },
			{ list: 'blocks', id: 'cpu' }
		] as const
	};
	expect(choiceOf(addressOf(address('?mode=old&select=blocks:x'), choice))).toEqual(choice);
});

it('other parameters stay', () => {
	const next = addressOf(address('?tab=2'), { mode: 'a', corner: null, net: null, selected: [] });
	expect(next.search).toBe('?tab=2&mode=a');
});

it('nonsense is left out', () => {
	expect(choiceOf(address('?select=nothing&select=spoons:3&select=blocks:cpu'))).toEqual({
		mode: null,
		corner: null,
		net: null,
		selected: [{ list: 'blocks', id: 'cpu' }]
	});
});

it('a large selection does not make a long address', () => {
	const selected = Array.from(
		{ length: 21 },
		(_, k) => ({ list: 'regulators', id: `R${k}` }) as const
	);
	expect(addressOf(address(''), { mode: null, corner: null, net: null, selected }).search).toBe('');
});
