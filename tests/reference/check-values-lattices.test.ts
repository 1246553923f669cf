/**
 * Numbers from outside for resistor lattices, run through the real mesh and solver: a lattice is a
 * plan of straps on two layers, a two-point resistance is the drop that 1 A makes between a feed of
 * 0 ohm and a block. Vias of a lattice are read at small resistances and continued to none.
 */
import { describe, expect, it } from 'vitest';
import type { Floorplan, FloorplanInput } from '#lib/floorplan/index.ts';
import { feedAt, latticePlan, loadAt, planOf, rectangle } from '../support/plans.ts';
import { solved, solvedModes, withoutVias } from '../support/solving.ts';

const PITCH_UM = 10;
/** High enough that no load comes near a tenth of nominal. */
const SOURCE_V = 10;

type Place = readonly [column: number, row: number];

/** A lattice fed at one crossing, with one mode per target that draws 1 A there. */
function probedLattice(
	columns: number,
	rows: number,
	from: Place,
	targets: readonly Place[],
	viaOhm: number,
	bonds: { x: number; y: number } = { x: 1, y: 1 }
): Floorplan {
	const at = ([column, row]: Place) => [column * PITCH_UM, row * PITCH_UM] as const;
	const lattice = latticePlan({ columns, rows, viaOhm, kind: 'input', volts: SOURCE_V });
	return planOf({
		die: lattice.die,
		layers: [
			{ ...lattice.layers[0], sheetOhm: bonds.x / 10 },
			{ ...lattice.layers[1], sheetOhm: bonds.y / 10 }
		],
		vias: lattice.vias,
		nets: lattice.nets,
		straps: lattice.straps,
		feeds: [feedAt('f', 'vdd', ...at(from), 0, { layer: 'm1' })],
		modes: targets.map((_, k) => ({ id: `t${k}` })),
		blocks: targets.map((target, k) =>
			loadAt(`b${k}`, 'vdd', ...at(target), 0, { amps: { [`t${k}`]: 1 } })
		)
	});
}

/** Two-point resistances from one crossing to others, ohm; bonds of 1 ohm. */
function resistances(
	columns: number,
	rows: number,
	from: Place,
	targets: readonly Place[],
	viaOhm: number,
	bonds?: { x: number; y: number }
): number[] {
	const modes = solvedModes(probedLattice(columns, rows, from, targets, viaOhm, bonds));
	return targets.map(([column, row], k) => {
		const answer = modes.get(`t${k}`);
		if (answer === undefined) throw new Error(`mode t${k} was not solved`);
		return SOURCE_V - answer.voltageAt('vdd', column * PITCH_UM, row * PITCH_UM);
	});
}

/** One two-point resistance without vias, ohm. */
function resistance(columns: number, rows: number, from: Place, to: Place): number {
	return withoutVias((viaOhm) => resistances(columns, rows, from, [to], viaOhm)[0]);
}

describe('CV-10: infinite square lattice of 1 ohm (Atkinson and van Steenwijk 1999, Cserti 2000)', () => {
	const published: readonly [number, number, number][] = [
		[1, 0, 1 / 2],
		[1, 1, 2 / Math.PI],
		[2, 0, 2 - 4 / Math.PI],
		[2, 1, 4 / Math.PI - 1 / 2],
		[2, 2, 8 / (3 * Math.PI)],
		[3, 0, 17 / 2 - 24 / Math.PI],
		[3, 1, 46 / (3 * Math.PI) - 4],
		[3, 2, 1 / 2 + 4 / (3 * Math.PI)],
		[3, 3, 46 / (15 * Math.PI)],
		[4, 1, 80 / Math.PI - 49 / 2]
	];
	const side = 101;
	const centre = (side - 1) / 2;
	const found = resistances(
		side,
		side,
		[centre, centre],
		published.map(([m, n]): Place => [centre + m, centre + n]),
		1e-6
	);

	it.each(published.map(([m, n, ohm], k) => ({ m, n, ohm, k, name: `(${m}, ${n})` })))(
		'$name is $ohm ohm',
		({ m, n, ohm, k }) => {
			// The finite lattice adds about 0.55 / K^2 times the square of the distance.
			const finite = (0.56 * (m * m + n * n)) / side ** 2;
			expect(found[k]).toBeGreaterThan(ohm);
			expect(found[k]).toBeLessThan(ohm + 1.2 * finite + 1e-5);
		}
	);

	it('a lattice of 101 adds 5.36e-5 to (1, 0)', () => {
		expect(found[0]).toBeCloseTo(0.5000536, 5);
	});
});

describe('CV-11: far apart R = (ln d + gamma + 1.5 ln 2) / pi (Cserti 2000)', () => {
	it('(10, 0) is 1.247351 ohm exactly, 1.247622 by the formula', () => {
		// The finite size adds a multiple of 1 / K^2: two sizes give the infinite lattice.
		const at = (side: number) => {
			const centre = (side - 1) / 2;
			return resistances(side, side, [centre - 5, centre], [[centre + 5, centre]], 1e-6)[0];
		};
		const [small, large] = [at(81), at(161)];
		const infinite = large + (large - small) / ((161 / 81) ** 2 - 1);
		expect(infinite).toBeCloseTo(1.247351, 4);
		const formula = (Math.log(10) + 0.5772157 + 1.5 * Math.log(2)) / Math.PI;
		expect(Math.abs(infinite / formula - 1)).toBeLessThan(3e-4);
	});
});

describe('CV-12: unequal layers, neighbours (2 r / pi) atan(sqrt(s / r))', () => {
	it('r = 1, s = 4: 0.704833 along x, 1.180669 along y, and Rx / r + Ry / s = 1', () => {
		const side = 161;
		const centre = (side - 1) / 2;
		const targets: Place[] = [
			[centre + 1, centre],
			[centre, centre + 1]
		];
		const [x, y] = resistances(side, side, [centre, centre], targets, 1e-6, { x: 1, y: 4 });
		expect(Math.abs(x / 0.704833 - 1)).toBeLessThan(2e-4);
		expect(Math.abs(y / 1.180669 - 1)).toBeLessThan(2e-4);
		expect(x + y / 4).toBeCloseTo(1, 3);
	});
});

describe('finite lattices', () => {
	it('CV-13: 5 x 4 of 1 ohm, corner to corner (F. Y. Wu 2004)', () => {
		expect(resistance(5, 4, [0, 0], [4, 3])).toBeCloseTo(2.042033235581623, 9);
	});

	it.each([
		{ n: 2, ohm: 1 },
		{ n: 3, ohm: 3 / 2 },
		{ n: 4, ohm: 13 / 7 },
		{ n: 5, ohm: 47 / 22 }
	])('CV-14: corner to corner of $n x $n is $ohm ohm (F. Y. Wu 2004)', ({ n, ohm }) => {
		expect(resistance(n, n, [0, 0], [n - 1, n - 1])).toBeCloseTo(ohm, 9);
	});

	it.each([
		{ n: 20, ohm: 3.892265 },
		{ n: 50, ohm: 5.058367 }
	])('CV-15: corner to corner of $n x $n is $ohm ohm (Essam and Wu 2009)', ({ n, ohm }) => {
		const found = resistance(n, n, [0, 0], [n - 1, n - 1]);
		expect(Math.abs(found / ohm - 1)).toBeLessThan(1e-6);
	});

	it('CV-16: 5 x 5 with its edge held, 1 A from each inner node (by hand)', () => {
		const places = Array.from({ length: 25 }, (_, k): Place => [k % 5, Math.floor(k / 5)]);
		const isEdge = ([i, j]: Place) => i % 4 === 0 || j % 4 === 0;
		const at = ([i, j]: Place) => [i * PITCH_UM, j * PITCH_UM] as const;
		const answer = (viaOhm: number) =>
			solved(
				latticePlan(
					{ columns: 5, rows: 5, viaOhm, kind: 'input', volts: SOURCE_V },
					{
						feeds: places.flatMap((place, k) =>
							isEdge(place)
								? ['m1', 'm2'].map((layer) =>
										feedAt(`f${k}.${layer}`, 'vdd', ...at(place), 0, { layer })
									)
								: []
						),
						blocks: places.flatMap((place, k) =>
							isEdge(place) ? [] : [loadAt(`b${k}`, 'vdd', ...at(place), 1)]
						)
					}
				)
			);
		const drop = (i: number, j: number) =>
			withoutVias((viaOhm) => SOURCE_V - answer(viaOhm).voltageAt('vdd', ...at([i, j])));
		expect(drop(2, 2)).toBeCloseTo(9 / 8, 9);
		expect(drop(2, 1)).toBeCloseTo(7 / 8, 9);
		expect(drop(1, 2)).toBeCloseTo(7 / 8, 9);
		expect(drop(1, 1)).toBeCloseTo(11 / 16, 9);
	});

	it('CV-03: the sum of R / r over all bonds of 5 x 4 is nodes - 1 = 19 (R. M. Foster 1949)', () => {
		const sum = withoutVias((viaOhm) => {
			let total = 0;
			for (let i = 0; i < 5; i++) {
				for (let j = 0; j < 4; j++) {
					const targets: Place[] = [];
					if (i < 4) targets.push([i + 1, j]);
					if (j < 3) targets.push([i, j + 1]);
					if (targets.length === 0) continue;
					total += resistances(5, 4, [i, j], targets, viaOhm).reduce((a, b) => a + b, 0);
				}
			}
			return total;
		});
		expect(sum).toBeCloseTo(19, 8);
	});

	it('CV-04: 1 A at a moves b as much as 1 A at b moves a (reciprocity)', () => {
		const a: Place = [1, 5];
		const b: Place = [6, 2];
		const modes = solvedModes(probedLattice(8, 7, [3, 3], [a, b], 0.2));
		const drop = (mode: string, [i, j]: Place) =>
			SOURCE_V - (modes.get(mode)?.voltageAt('vdd', i * PITCH_UM, j * PITCH_UM) ?? NaN);
		expect(drop('t0', b)).toBeGreaterThan(0.1);
		expect(drop('t1', a)).toBeCloseTo(drop('t0', b), 11);
	});
});

describe('plates of straps', () => {
	/** A square of 800 um under uniform load, as straps of 1 ohm per square, fed where asked. */
	function plate(feedsAt: (side: number) => Place[], offsetUm: number, amps: number): Floorplan {
		const side = 81;
		const spanUm = (side - 1) * PITCH_UM;
		const strap = { net: 'vdd', pitchUm: PITCH_UM, widthUm: 1 };
		const feeds: FloorplanInput['feeds'] = feedsAt(side).map(([i, j], k) =>
			feedAt(`f${k}`, 'vdd', i * PITCH_UM, j * PITCH_UM + offsetUm, 0, { layer: 'm1' })
		);
		return planOf({
			die: { outline: rectangle(0, 0, spanUm, spanUm) },
			layers: [
				{ id: 'm1', direction: 'horizontal', sheetOhm: 0.1 },
				{ id: 'm2', direction: 'vertical', sheetOhm: 0.1 }
			],
			vias: [{ id: 'v1', lower: 'm1', upper: 'm2', ohmPerCut: 1e-5, cutsPerUm2: 0 }],
			nets: [{ id: 'vdd', kind: 'input', volts: SOURCE_V }],
			straps: [
				{ id: 'h', ...strap, layer: 'm1', offsetUm },
				{ id: 'v', ...strap, layer: 'm2', offsetUm: 0 }
			],
			feeds,
			blocks: [
				{
					id: 'load',
					net: 'vdd',
					outline: rectangle(0, 0, spanUm, spanUm),
					amps: { default: amps }
				}
			]
		});
	}

	it('CV-23: fed along one edge, the far edge drops J Rs a^2 / 2 (one-dimensional)', () => {
		// Straps half a pitch off the edges: each carries the load of its own strip, and no more.
		const rows = (side: number) => Array.from({ length: side - 1 }, (_, j): Place => [0, j]);
		const answer = solved(plate(rows, PITCH_UM / 2, 1));
		expect(answer.result.nets[0].worstDropV).toBeCloseTo(1 / 2, 9);
	});

	it('CV-23: fed along two opposite edges, the middle drops J Rs a^2 / 8', () => {
		const rows = (side: number) =>
			Array.from({ length: side - 1 }, (_, j): Place[] => [
				[0, j],
				[side - 1, j]
			]).flat();
		const answer = solved(plate(rows, PITCH_UM / 2, 1));
		expect(answer.result.nets[0].worstDropV).toBeCloseTo(1 / 8, 9);
		expect(answer.result.nets[0].worst.xUm).toBe(400);
	});

	it('CV-24: fed along all four edges, the centre drops 0.0736713 J Rs a^2 (torsion of a bar)', () => {
		const edges = (side: number) =>
			Array.from({ length: side }, (_, k): Place[] => [
				[0, k],
				[side - 1, k],
				[k, 0],
				[k, side - 1]
			]).flat();
		const answer = solved(plate(edges, 0, 1));
		const { worst, worstDropV } = answer.result.nets[0];
		expect([worst.xUm, worst.yUm]).toEqual([400, 400]);
		expect(Math.abs(worstDropV / 0.0736713 - 1)).toBeLessThan(2e-4);
	});

	it('CV-32: four corners, R_AB,CD = Rs ln 2 / pi (van der Pauw 1958)', () => {
		const side = 161;
		const last = side - 1;
		const modes = solvedModes(probedLattice(side, side, [0, 0], [[last, 0]], 1e-6));
		const answer = modes.get('t0');
		const c = answer?.voltageAt('vdd', last * PITCH_UM, last * PITCH_UM) ?? NaN;
		const d = answer?.voltageAt('vdd', 0, last * PITCH_UM) ?? NaN;
		expect(Math.abs((d - c) / 0.2206356 - 1)).toBeLessThan(1e-4);
	});
});
