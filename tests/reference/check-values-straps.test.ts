/** Numbers from outside for single straps and for metal, run through the real mesh and solver. */
import { describe, expect, it } from 'vitest';
import type { Floorplan } from '#lib/floorplan/index.ts';
import { sg13g2, sky130 } from '#lib/library/index.ts';
import { feedAt, ladderPlan, loadAt, planOf, rectangle } from '../support/plans.ts';
import { solved } from '../support/solving.ts';

/** A strap under uniform load, fed at one or both ends. */
function loadedStrap(feedsAtUm: readonly number[], amps: number, totalOhm: number): Floorplan {
	return ladderPlan(
		{ kind: 'input', lengthUm: 400, totalOhm },
		{
			feeds: feedsAtUm.map((xUm, k) => feedAt(`f${k}`, 'vdd', xUm, 0, 0)),
			blocks: [
				{
					id: 'load',
					net: 'vdd',
					outline: rectangle(0, -5, 400, 5),
					amps: { default: amps }
				}
			]
		}
	);
}

describe('a strap of total resistance R under uniform load I (textbook)', () => {
	it('CV-20: fed at one end it drops I R / 2 at the other', () => {
		const { worst, worstDropV } = solved(loadedStrap([0], 0.2, 1.5)).result.nets[0];
		expect(worstDropV).toBeCloseTo((0.2 * 1.5) / 2, 11);
		expect(worst.xUm).toBe(400);
	});

	it('CV-21: fed at both ends it drops I R / 8 in the middle', () => {
		const answer = solved(loadedStrap([0, 400], 0.2, 1.5)).result;
		expect(answer.nets[0].worstDropV).toBeCloseTo((0.2 * 1.5) / 8, 11);
		expect(answer.nets[0].worst.xUm).toBe(200);
		answer.feeds.forEach(({ amps }) => expect(amps).toBeCloseTo(0.1, 11));
	});
});

type Stack = typeof sky130;

/** One strap of a published layer between a feed and a load at its ends; what they say of it. */
function publishedStrap(
	stack: Stack,
	layerId: string,
	lengthUm: number,
	widthUm: number,
	temperatureC: number
) {
	const layer = stack.layers.find(({ id }) => id === layerId);
	if (layer === undefined) throw new Error(`${stack.id} has no layer ${layerId}`);
	const along = layer.direction === 'horizontal';
	const [width, height] = along ? [lengthUm, 2 * widthUm] : [2 * widthUm, lengthUm];
	const [endX, endY] = along ? [lengthUm, widthUm] : [widthUm, lengthUm];
	const plan = planOf({
		die: { outline: rectangle(0, 0, width, height) },
		layers: [layer],
		nets: [{ id: 'vdd', kind: 'input', volts: 1 }],
		straps: [
			{
				id: 's',
				net: 'vdd',
				layer: layerId,
				pitchUm: 2 * widthUm,
				widthUm,
				offsetUm: widthUm
			}
		],
		feeds: [feedAt('f', 'vdd', along ? 0 : widthUm, along ? widthUm : 0, 0)],
		blocks: [loadAt('load', 'vdd', endX, endY, 0.1)],
		corners: [{ id: 'c', temperatureC }]
	});
	const answer = solved(plan);
	const [worst] = answer.result.straps.worst;
	return { ohm: (1 - answer.voltageAt('vdd', endX, endY)) / 0.1, limitA: worst?.limitA };
}

describe('published metal', () => {
	it('CV-94: SKY130 met5, 1000 um x 10 um: 2.90 ohm, limit 101.7 mA', () => {
		const { ohm, limitA } = publishedStrap(sky130, 'met5', 1000, 10, 25);
		expect(ohm).toBeCloseTo(2.9, 10);
		expect(limitA).toBeCloseTo(0.1017, 12);
	});

	it('CV-95: SG13G2 TopMetal2, 200 um x 20 um at 27 C: 0.110 ohm, limit 320 mA', () => {
		const { ohm, limitA } = publishedStrap(sg13g2, 'TopMetal2', 200, 20, 27);
		expect(ohm).toBeCloseTo(0.11, 11);
		expect(limitA).toBeCloseTo(0.32, 12);
	});

	it('CV-95: SG13G2 thin metal at 125 C has 1.343 times its resistance at 27 C', () => {
		const at = (temperatureC: number) =>
			publishedStrap(sg13g2, 'Metal3', 200, 20, temperatureC).ohm;
		expect(at(125) / at(27)).toBeCloseTo(1.343, 9);
	});

	it.each([
		{ id: 'CV-80', metal: 'copper', tempCoPerC: 0.00393, factor: 1.25545 },
		{ id: 'CV-81', metal: 'aluminium', tempCoPerC: 0.00403, factor: 1.26195 }
	])('$id: $metal at 85 C has $factor times its resistance at 20 C', ({ tempCoPerC, factor }) => {
		const plan = loadedStrap([0], 0.2, 1.5);
		const worst = (temperatureC: number) =>
			solved({
				...plan,
				layers: [{ ...plan.layers[0], tempCoPerC, refC: 20 }],
				corners: [{ ...plan.corners[0], temperatureC }]
			}).result.nets[0].worstDropV;
		expect(worst(85) / worst(20)).toBeCloseTo(factor, 10);
	});

	it('CV-96: 20 SKY130 via3 cuts in parallel: 0.1705 ohm, 9.6 mA', () => {
		const via3 = sky130.vias.find(({ id }) => id === 'via3');
		const layers = sky130.layers.filter(({ id }) => id === 'met3' || id === 'met4');
		if (via3 === undefined) throw new Error('the stack has no via3');
		// One crossing of straps 1.6 um and 2 um wide: floor(3.2 * 6.25) = 20 cuts.
		const plan = planOf({
			die: { outline: rectangle(0, 0, 20, 20) },
			layers: layers.map((layer) => ({ ...layer })),
			vias: [via3],
			nets: [{ id: 'vdd', kind: 'input', volts: 1 }],
			straps: [
				{ id: 'h', net: 'vdd', layer: 'met3', pitchUm: 40, widthUm: 1.6, offsetUm: 10 },
				{ id: 'v', net: 'vdd', layer: 'met4', pitchUm: 40, widthUm: 2, offsetUm: 10 }
			],
			feeds: [feedAt('f', 'vdd', 10, 10, 0)],
			blocks: [loadAt('load', 'vdd', 10, 10, 0.5)]
		});
		const { result } = solved(plan);
		expect(result.blocks[0].worstDropV / 0.5).toBeCloseTo(0.1705, 10);
		expect(result.vias.worst[0].cuts).toBe(20);
		expect(result.vias.worst[0].limitA).toBeCloseTo(0.0096, 12);
		expect(result.vias.worst[0].amps).toBeCloseTo(0.5, 10);
	});

	it.each([
		{ temperatureC: 85, factor: 2.0953 },
		{ temperatureC: 110, factor: 1 },
		{ temperatureC: 125, factor: 0.67083 }
	])(
		"CV-83: Black's equation moves a limit at 110 C by $factor at $temperatureC C",
		({ temperatureC, factor }) => {
			// GlobalFoundries 180MCU design manual 14.2.2: Ea 0.7 eV, n 2, T0 110 C. The value rests on
			// k = 8.62e-5 eV/K; the exact constant moves it by 3e-4.
			const plan = loadedStrap([0], 0.2, 1.5);
			const { result } = solved({
				...plan,
				layers: [
					{ ...plan.layers[0], maxMaPerUm: 1, emActivationEv: 0.7, emExponent: 2, emRefC: 110 }
				],
				corners: [{ ...plan.corners[0], temperatureC }]
			});
			expect(Math.abs(result.straps.worst[0].limitA / (1e-3 * factor) - 1)).toBeLessThan(4e-4);
		}
	);
});
