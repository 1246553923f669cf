/** Random small rails for property tests: a lattice with regulators and loads on its crossings. */
import fc from 'fast-check';
import type { Floorplan } from '#lib/floorplan/index.ts';
import { cellOf, latticePlan, loadAt, regulatorAt } from './plans.ts';

export const RAIL_PITCH_UM = 10;

export interface RailSpot {
	readonly column: number;
	readonly row: number;
}

/** What a random rail is made of; `railPlan` makes the document. */
export interface RailParts {
	readonly columns: number;
	readonly rows: number;
	readonly bondOhm: number;
	readonly viaOhm: number;
	readonly outputOhm: number;
	readonly regulators: readonly (RailSpot & { readonly offsetV: number })[];
	readonly loads: readonly (RailSpot & { readonly amps: number })[];
}

const milli = (least: number, most: number) =>
	fc.integer({ min: least, max: most }).map((value) => value / 1000);

/** Rails of 2 x 2 to 9 x 9 crossings; offsets up to `maxOffsetMv` either way. */
export function railParts(maxOffsetMv: number): fc.Arbitrary<RailParts> {
	return fc
		.record({ columns: fc.integer({ min: 2, max: 9 }), rows: fc.integer({ min: 2, max: 9 }) })
		.chain(({ columns, rows }) => {
			const spot = {
				column: fc.integer({ min: 0, max: columns - 1 }),
				row: fc.integer({ min: 0, max: rows - 1 })
			};
			return fc.record({
				columns: fc.constant(columns),
				rows: fc.constant(rows),
				bondOhm: milli(5, 500),
				viaOhm: milli(1, 100),
				outputOhm: milli(5, 500),
				regulators: fc.array(fc.record({ ...spot, offsetV: milli(-maxOffsetMv, maxOffsetMv) }), {
					minLength: 1,
					maxLength: 6
				}),
				loads: fc.array(fc.record({ ...spot, amps: milli(1, 50) }), {
					minLength: 1,
					maxLength: 6
				})
			});
		});
}

/**
 * The document of a rail `vdd` of 1 V, its units r0, r1, ... with ideal inputs and its loads b0, b1, ...
 * @param sinkA what a unit may sink: much of it keeps the rail linear
 */
export function railPlan(parts: RailParts, sinkA: number): Floorplan {
	const at = ({ column, row }: RailSpot) => [column * RAIL_PITCH_UM, row * RAIL_PITCH_UM] as const;
	return latticePlan(
		{
			columns: parts.columns,
			rows: parts.rows,
			pitchUm: RAIL_PITCH_UM,
			bondOhm: parts.bondOhm,
			viaOhm: parts.viaOhm
		},
		{
			cells: [cellOf('unit', { outputOhm: parts.outputOhm, maxA: 100, sinkA })],
			regulators: parts.regulators.map((unit, k) =>
				regulatorAt(`r${k}`, 'vdd', ...at(unit), { offsetV: unit.offsetV })
			),
			blocks: parts.loads.map((load, k) => loadAt(`b${k}`, 'vdd', ...at(load), load.amps))
		}
	);
}
