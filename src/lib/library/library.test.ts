import { describe, expect, it } from 'vitest';
import { floorplanSchema } from '#lib/floorplan/index.ts';
import { openStacks, sg13g2, sky130 } from './index.ts';

function layerOf(stack: (typeof openStacks)[number], id: string) {
	const layer = stack.layers.find((candidate) => candidate.id === id);
	if (!layer) throw new Error(`no layer ${id}`);
	return layer;
}

describe('open process stacks', () => {
	it.each(openStacks.map((stack) => [stack.id, stack] as const))(
		'%s is a valid stack with vias between crossing neighbours',
		(_id, stack) => {
			const floorplan = floorplanSchema.parse({
				format: 'manyweir-floorplan',
				version: 1,
				die: {
					outline: [
						[0, 0],
						[10, 0],
						[10, 10]
					]
				},
				layers: stack.layers,
				vias: stack.vias,
				nets: [{ id: 'n', kind: 'input', volts: 1 }],
				straps: []
			});
			const index = new Map(floorplan.layers.map((layer, i) => [layer.id, i]));
			for (const via of floorplan.vias) {
				expect(index.get(via.upper)).toBe((index.get(via.lower) ?? NaN) + 1);
				expect(layerOf(stack, via.upper).direction).not.toBe(layerOf(stack, via.lower).direction);
			}
		}
	);

	// Source: SkyWater SKY130 PDK documentation, resistance values and technology LEF (CV-94).
	it('CV-94: a SKY130 met5 strap of 1000 um x 10 um is 2.90 ohm and carries 101.7 mA', () => {
		const met5 = layerOf(sky130, 'met5');
		expect((met5.sheetOhm * 1000) / 10).toBeCloseTo(2.9, 12);
		expect((met5.maxMaPerUm ?? NaN) * 10).toBeCloseTo(101.7, 12);
	});

	// Source: IHP SG13G2 Process Specification rev. 1.2, 2.13 to 2.16 (CV-95).
	it('CV-95: SG13G2 TopMetal2 of 200 um x 20 um is 0.110 ohm; Metal at 125 C is 1.343 times typical', () => {
		const top = layerOf(sg13g2, 'TopMetal2');
		expect((top.sheetOhm * 200) / 20).toBeCloseTo(0.11, 12);
		expect((top.maxMaPerUm ?? NaN) * 20).toBeCloseTo(320, 9);
		const metal = layerOf(sg13g2, 'Metal4');
		expect(1 + (metal.tempCoPerC ?? 0) * (125 - (metal.refC ?? 25))).toBeCloseTo(1.343, 3);
	});

	// Source: layout rules of the kits, cut size and space (CV-98).
	it('CV-98: densest cuts per um^2', () => {
		const density = (stack: (typeof openStacks)[number], id: string) =>
			stack.vias.find((via) => via.id === id)?.cutsPerUm2;
		expect(density(sky130, 'via')).toBeCloseTo(9.766, 3);
		expect(density(sky130, 'via4')).toBeCloseTo(0.390625, 9);
		expect(density(sg13g2, 'Via4')).toBeCloseTo(5.949, 3);
		expect(density(sg13g2, 'TopVia1')).toBeCloseTo(1.417, 3);
		expect(density(sg13g2, 'TopVia2')).toBeCloseTo(0.2603, 4);
	});
});
