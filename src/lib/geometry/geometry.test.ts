import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
	boundsOf,
	clipLineToPolygon,
	composeOrientations,
	containsPoint,
	isSimplePolygon,
	orientedSize,
	orientPoint,
	polygonContainsBounds,
	polygonOverlapsBounds,
	polygonRectangleArea,
	polygonsOverlap,
	rectangleOutline,
	signedArea,
	type Bounds,
	type Orientation,
	type Outline
} from './index.ts';
import { isOnSegment, segmentsTouch, turn } from './predicates.ts';

const square = rectangleOutline({ minX: 0, minY: 0, maxX: 10, maxY: 10 });
/** A U open to the top: two arms of width 3 around a gap from x = 3 to 7 above y = 4. */
const u: Outline = [
	[0, 0],
	[10, 0],
	[10, 10],
	[7, 10],
	[7, 4],
	[3, 4],
	[3, 10],
	[0, 10]
];

describe('area and containment', () => {
	it('area is positive for left turns and negative for right turns', () => {
		expect(signedArea(u)).toBe(76);
		expect(signedArea([...u].reverse())).toBe(-76);
	});

	it('the boundary is inside, the gap of a U is outside', () => {
		expect(containsPoint(u, 5, 4)).toBe(true);
		expect(containsPoint(u, 0, 0)).toBe(true);
		expect(containsPoint(u, 5, 4.001)).toBe(false);
		expect(containsPoint(u, 2, 9)).toBe(true);
	});
});

describe('isSimplePolygon', () => {
	it.each<[string, Outline, boolean]>([
		['a square', square, true],
		['a U', u, true],
		[
			'a bow tie',
			[
				[0, 0],
				[10, 10],
				[10, 0],
				[0, 10]
			],
			false
		],
		[
			'a corner that touches an edge',
			[
				[0, 0],
				[10, 0],
				[10, 10],
				[5, 0],
				[0, 10]
			],
			false
		],
		[
			'an edge that folds back',
			[
				[0, 0],
				[10, 0],
				[4, 0],
				[4, 5]
			],
			false
		],
		[
			'a repeated corner',
			[
				[0, 0],
				[0, 0],
				[10, 0],
				[10, 10]
			],
			false
		],
		[
			'two corners',
			[
				[0, 0],
				[1, 1]
			],
			false
		]
	])('%s', (_name, outline, expected) => {
		expect(isSimplePolygon(outline)).toBe(expected);
	});
});

describe('isSimplePolygon, swept', () => {
	/** By definition: no two edges share a point, save neighbours their common corner. */
	function isSimpleByDefinition(outline: Outline): boolean {
		const n = outline.length;
		const edge = (i: number) => [outline[i % n], outline[(i + 1) % n]] as const;
		for (let i = 0; i < n; i++) {
			const [p, q] = edge(i);
			const [, after] = edge(i + 1);
			if (p[0] === q[0] && p[1] === q[1]) return false;
			// A neighbour that lies on this edge folds back over it.
			if (isOnSegment(p, q, after) || isOnSegment(q, after, p)) return false;
			for (let j = i + 2; j < n; j++) {
				if (i === 0 && j === n - 1) continue;
				if (segmentsTouch(p, q, ...edge(j))) return false;
			}
		}
		return true;
	}

	it('agrees with the definition on small grids, where every degenerate case comes up', () => {
		let simple = 0;
		fc.assert(
			fc.property(
				fc.array(fc.tuple(fc.nat(4), fc.nat(4)), { minLength: 3, maxLength: 7 }),
				(outline) => {
					const expected = isSimpleByDefinition(outline);
					if (expected) simple++;
					expect(isSimplePolygon(outline)).toBe(expected);
				}
			),
			{ numRuns: 3000 }
		);
		expect(simple).toBeGreaterThan(100);
	});

	it('a comb of 10,000 corners is simple until one tooth reaches over the next', () => {
		const comb: [number, number][] = [
			[10_000, 0],
			[0, 0]
		];
		// A sloping ridge of teeth: all edges overlap in y, so that bounds alone tell nothing.
		for (let k = 0; k < 4999; k++) comb.push([2 * k, 1_000_000 + k], [2 * k + 1, 10]);
		comb[0] = [2 * 4999, 0];
		expect(isSimplePolygon(comb)).toBe(true);
		comb[5000] = [comb[5000][0] + 3, comb[5000][1]];
		expect(isSimplePolygon(comb)).toBe(false);
	});

	it('is exact where products leave the range of doubles', () => {
		// The corner lies one nanometre beside a diagonal of 2 m length, or on it.
		const big = 999_999_999;
		const withCorner = (x: number, y: number): Outline => [
			[-big, -big],
			[big, big],
			[big, big + 1],
			[x, y],
			[-big, -big + 5]
		];
		expect(isSimplePolygon(withCorner(12_345, 12_346))).toBe(true);
		expect(isSimplePolygon(withCorner(12_345, 12_345))).toBe(false);
		expect(turn([-big, -big], [big, big - 1], [0, 0])).toBe(1);
		expect(turn([-big, -big], [big, big], [1, 1])).toBe(0);
	});
});

describe('clipLineToPolygon', () => {
	it('a line through both arms of a U has two parts', () => {
		expect(clipLineToPolygon(u, 'horizontal', 6)).toEqual([
			[0, 3],
			[7, 10]
		]);
		expect(clipLineToPolygon(u, 'vertical', 5)).toEqual([[0, 4]]);
	});

	it('a line along a boundary edge is inside', () => {
		expect(clipLineToPolygon(u, 'horizontal', 0)).toEqual([[0, 10]]);
		expect(clipLineToPolygon(u, 'horizontal', 4)).toEqual([[0, 10]]);
		expect(clipLineToPolygon(u, 'vertical', 10)).toEqual([[0, 10]]);
		expect(clipLineToPolygon(u, 'vertical', 3)).toEqual([[0, 10]]);
	});

	it('a line that only touches a corner, or misses, has no part', () => {
		expect(
			clipLineToPolygon(
				[
					[0, 0],
					[4, 4],
					[0, 8]
				],
				'vertical',
				4
			)
		).toEqual([]);
		expect(clipLineToPolygon(square, 'horizontal', 11)).toEqual([]);
	});
});

describe('polygonRectangleArea', () => {
	it('a rectangle over the gap of a U counts only the arms', () => {
		expect(polygonRectangleArea(u, { minX: 2, minY: 3, maxX: 8, maxY: 9 })).toBe(6 + 2 * 5);
	});

	it('tiles of a grid add up to the polygon', () => {
		fc.assert(
			fc.property(
				fc.integer({ min: 1, max: 9 }),
				fc.integer({ min: 1, max: 9 }),
				(columns, rows) => {
					let sum = 0;
					for (let i = 0; i < columns; i++) {
						for (let j = 0; j < rows; j++) {
							sum += polygonRectangleArea(u, {
								minX: (10 * i) / columns,
								minY: (10 * j) / rows,
								maxX: (10 * (i + 1)) / columns,
								maxY: (10 * (j + 1)) / rows
							});
						}
					}
					expect(sum).toBeCloseTo(76, 9);
				}
			)
		);
	});
});

describe('polygonsOverlap', () => {
	const box = (minX: number, minY: number, maxX: number, maxY: number): Outline =>
		rectangleOutline({ minX, minY, maxX, maxY });
	it.each<[string, Outline, Outline, boolean]>([
		['shared corner area', square, box(9, 9, 12, 12), true],
		['touching edges', square, box(10, 0, 12, 10), false],
		['touching corners', square, box(10, 10, 12, 12), false],
		['one within the other', square, box(2, 2, 3, 3), true],
		['the same shape', square, square, true],
		['a cross', box(-1, 4, 11, 6), box(4, -1, 6, 11), true],
		['in the gap of a U', u, box(3, 4, 7, 10), false],
		['over the gap of a U', u, box(2, 5, 8, 6), true],
		['same height, side by side overlap', square, box(5, 0, 15, 10), true]
	])('%s', (_name, a, b, expected) => {
		expect(polygonsOverlap(a, b)).toBe(expected);
		expect(polygonsOverlap(b, a)).toBe(expected);
	});

	it('triangles that share a long diagonal, cut at odd places, only touch', () => {
		const big = 999_999_937;
		const lower: Outline = [
			[0, 0],
			[3 * big, 0],
			[3 * big, big]
		];
		const upper: Outline = [
			[0, 0],
			[3, 1],
			[3 * big, big],
			[0, big]
		];
		expect(polygonsOverlap(lower, upper)).toBe(false);
		expect(
			polygonsOverlap(lower, [
				[0, 0],
				[3, 1],
				[3 * big, big - 1],
				[0, big]
			])
		).toBe(true);
	});

	it('is symmetric and agrees with the unit cells that triangles share', () => {
		const triangle = fc
			.array(fc.tuple(fc.nat(6), fc.nat(6)), { minLength: 3, maxLength: 3 })
			.filter((corners) => signedArea(corners) !== 0);
		fc.assert(
			fc.property(triangle, triangle, (a, b) => {
				const answer = polygonsOverlap(a, b);
				expect(polygonsOverlap(b, a)).toBe(answer);
				// A fine grid of sample points: any that is in both polygons by a margin shows an overlap.
				const shares = [...Array(61 * 61).keys()].some((k) => {
					const [x, y] = [(k % 61) / 10 + 0.0137, Math.floor(k / 61) / 10 + 0.0071];
					return containsPoint(a, x, y) && containsPoint(b, x, y);
				});
				if (shares) expect(answer).toBe(true);
			}),
			{ numRuns: 200 }
		);
	});

	it('agrees with the shared area for rectangles on a grid', () => {
		const bounds = fc
			.tuple(fc.nat(8), fc.nat(8), fc.integer({ min: 1, max: 5 }), fc.integer({ min: 1, max: 5 }))
			.map(([x, y, w, h]): Bounds => ({ minX: x, minY: y, maxX: x + w, maxY: y + h }));
		fc.assert(
			fc.property(bounds, (b) => {
				expect(polygonsOverlap(u, rectangleOutline(b))).toBe(polygonRectangleArea(u, b) > 0);
				expect(polygonOverlapsBounds(u, b)).toBe(polygonRectangleArea(u, b) > 0);
				expect(polygonContainsBounds(u, b)).toBe(
					polygonRectangleArea(u, b) === (b.maxX - b.minX) * (b.maxY - b.minY)
				);
			})
		);
	});
});

describe('orientations', () => {
	// An asymmetric cell of 4 x 2 with a pin at (1, 0.5); placed positions by hand (CV-115: the lower
	// left of the turned box stays at the placed point).
	it.each<[Orientation, readonly [number, number], readonly [number, number]]>([
		['R0', [4, 2], [1, 0.5]],
		['R90', [2, 4], [1.5, 1]],
		['R180', [4, 2], [3, 1.5]],
		['R270', [2, 4], [0.5, 3]],
		['MX', [4, 2], [1, 1.5]],
		['MY', [4, 2], [3, 0.5]],
		['MXR90', [2, 4], [0.5, 1]],
		['MYR90', [2, 4], [1.5, 3]]
	])('%s', (orient, size, pin) => {
		expect(orientedSize(4, 2, orient)).toEqual(size);
		expect(orientPoint([1, 0.5], 4, 2, orient)).toEqual(pin);
	});

	it('mirroring and turning compose as the pin moves', () => {
		const names: Orientation[] = ['R0', 'R90', 'R180', 'R270', 'MX', 'MY', 'MXR90', 'MYR90'];
		for (const first of names) {
			for (const second of names) {
				const [w, h] = orientedSize(4, 2, first);
				const once = orientPoint([1, 0.5], 4, 2, first);
				expect(orientPoint([1, 0.5], 4, 2, composeOrientations(first, second))).toEqual(
					orientPoint(once, w, h, second)
				);
			}
		}
		expect(composeOrientations('MX', 'R90')).toBe('MXR90');
	});

	it('bounds hold every corner', () => {
		expect(boundsOf(u)).toEqual({ minX: 0, minY: 0, maxX: 10, maxY: 10 });
	});
});
