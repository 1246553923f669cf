import { readFileSync } from 'node:fs';
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { floorplanSchema, type Floorplan } from '../index.ts';
import { buildPlacementIndex, checkAllPlacements, checkPlacement, snapToSite } from './index.ts';

const example = floorplanSchema.parse(
	JSON.parse(readFileSync('tests/fixtures/floorplan-version-1.json', 'utf8'))
);

/** Codes of the reasons when R1 stands at a place, turned or not. */
function codesAt(
	xUm: number,
	yUm: number,
	changes: Partial<Floorplan> = {},
	orient: 'R0' | 'R90' = 'R0'
) {
	const floorplan = { ...example, ...changes };
	return checkPlacement(buildPlacementIndex(floorplan), {
		...floorplan.regulators[0],
		xUm,
		yUm,
		orient
	}).map(({ code }) => code);
}

describe('checkPlacement', () => {
	it.each<[string, number, number, string[]]>([
		['a free site', 40, 40, []],
		['flush with the die edge', 180, 90, []],
		['beyond the die', 185, 40, ['outside-die']],
		['between sites', 42, 40, ['off-site']],
		['on top of R2', 130, 45, ['overlap']],
		['touching R2', 140, 40, ['spacing']],
		['at the least spacing from R2', 145, 40, []]
	])('%s', (_name, xUm, yUm, expected) => {
		expect(codesAt(xUm, yUm)).toEqual(expected);
	});

	it('a turned footprint reaches elsewhere', () => {
		expect(codesAt(0, 85, {}, 'R0')).toEqual([]);
		expect(codesAt(0, 85, {}, 'R90')).toEqual(['outside-die']);
	});

	it('a keep-out counts by its area, not by its bounds', () => {
		const keepouts: Floorplan['keepouts'] = [
			{
				id: 'corner',
				outline: [
					[0, 0],
					[40, 0],
					[0, 40]
				],
				forbids: ['regulators']
			}
		];
		expect(codesAt(5, 5, { keepouts })).toEqual(['keep-out']);
		expect(codesAt(30, 30, { keepouts })).toEqual([]);
		expect(codesAt(5, 5, { keepouts: [{ ...keepouts[0], forbids: ['straps'] }] })).toEqual([]);
	});

	it('decimal fractions that only touch do not overlap', () => {
		// 0.1 + 0.2 is more than 0.3 in doubles.
		const cells = [{ ...example.cells[0], widthUm: 0.2, heightUm: 0.2 }];
		const [first] = example.regulators;
		const regulators = [first, { ...first, id: 'R2', xUm: 0.3, yUm: 0.1 }];
		const keepouts: Floorplan['keepouts'] = [
			{
				id: 'left',
				outline: [
					[0, 0.3],
					[0.4, 0.3],
					[0.4, 0.7]
				],
				forbids: ['regulators']
			}
		];
		const changes = { cells, regulators, keepouts, limits: {}, sites: undefined };
		expect(codesAt(0.1, 0.1, changes)).toEqual([]);
		expect(codesAt(0.101, 0.1, changes)).toEqual(['overlap']);
		expect(codesAt(0.1, 0.101, changes)).toEqual(['keep-out']);
	});

	it('agrees with a comparison of all pairs', () => {
		const places = fc.array(
			fc.record({
				xUm: fc.integer({ min: 0, max: 60 }),
				yUm: fc.integer({ min: 0, max: 60 }),
				orient: fc.constantFrom('R0' as const, 'R90' as const, 'MX' as const)
			}),
			{ minLength: 2, maxLength: 12 }
		);
		fc.assert(
			fc.property(places, fc.nat(8), (all, spacingUm) => {
				const regulators = all.map((place, i) => ({
					...example.regulators[0],
					...place,
					id: `R${i}`
				}));
				const floorplan = { ...example, regulators, sites: undefined, limits: { spacingUm } };
				const index = buildPlacementIndex(floorplan);
				for (const one of regulators) {
					const found = checkPlacement(index, one)
						.filter(({ other }) => other !== undefined)
						.map(({ code, other }) => `${code} ${other}`);
					const expected = regulators.flatMap((other) => {
						if (other === one) return [];
						// Cells are 20 by 10 um; whole numbers, so that nothing is rounded.
						const [w1, h1] = one.orient === 'R90' ? [10, 20] : [20, 10];
						const [w2, h2] = other.orient === 'R90' ? [10, 20] : [20, 10];
						const dx = Math.max(one.xUm - (other.xUm + w2), other.xUm - (one.xUm + w1));
						const dy = Math.max(one.yUm - (other.yUm + h2), other.yUm - (one.yUm + h1));
						if (dx < 0 && dy < 0) return [`overlap ${other.id}`];
						const gap = Math.max(dx, 0) ** 2 + Math.max(dy, 0) ** 2;
						return gap < spacingUm ** 2 ? [`spacing ${other.id}`] : [];
					});
					expect(found.sort()).toEqual(expected.sort());
				}
			})
		);
	});

	it('units that move along are ignored', () => {
		const index = buildPlacementIndex(example);
		const onR2 = { ...example.regulators[0], xUm: 130, yUm: 45 };
		expect(checkPlacement(index, onR2, new Set(['R2']))).toEqual([]);
	});

	it('the document as a whole: only offenders are listed', () => {
		expect(checkAllPlacements(example)).toEqual([]);
		const [first, second] = example.regulators;
		const crowded = { ...example, regulators: [first, { ...second, xUm: 50 }] };
		expect(checkAllPlacements(crowded).map(({ regulator }) => regulator.id)).toEqual(['R1', 'R2']);
	});
});

it('snapToSite finds the nearest site, or the nanometre without sites', () => {
	expect(snapToSite(example, 41.9, -2.6)).toEqual([40, -5]);
	expect(snapToSite({ ...example, sites: undefined }, 41.98765, 1)).toEqual([41.988, 1]);
});
