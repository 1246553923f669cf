import { cutsPerUm2, type RailStack } from './stack.ts';

/**
 * SG13G2 from Metal3 up. Typical sheet and via resistances at 27 C, temperature coefficients, and
 * direct-current limits of narrow lines (11 years at 105 C) from sections 2.13 to 2.16; cut sizes
 * from the layout rules.
 */
export const sg13g2: RailStack = {
	id: 'sg13g2',
	version: 1,
	name: 'SG13G2, Metal3 to TopMetal2',
	source:
		'IHP SG13G2 Process Specification rev. 1.2 (2023), 2.13 to 2.16, typical column; Layout Rules',
	licence: 'Apache-2.0',
	layers: [
		{
			id: 'Metal3',
			direction: 'horizontal',
			sheetOhm: 0.088,
			tempCoPerC: 0.0035,
			refC: 27,
			thicknessUm: 0.49,
			maxMaPerUm: 2
		},
		{
			id: 'Metal4',
			direction: 'vertical',
			sheetOhm: 0.088,
			tempCoPerC: 0.0035,
			refC: 27,
			thicknessUm: 0.49,
			maxMaPerUm: 2
		},
		{
			id: 'Metal5',
			direction: 'horizontal',
			sheetOhm: 0.088,
			tempCoPerC: 0.0035,
			refC: 27,
			thicknessUm: 0.49,
			maxMaPerUm: 2
		},
		{
			id: 'TopMetal1',
			direction: 'vertical',
			sheetOhm: 0.018,
			tempCoPerC: 0.0037,
			refC: 27,
			thicknessUm: 2,
			maxMaPerUm: 15
		},
		{
			id: 'TopMetal2',
			direction: 'horizontal',
			sheetOhm: 0.011,
			tempCoPerC: 0.0038,
			refC: 27,
			thicknessUm: 3,
			maxMaPerUm: 16
		}
	],
	vias: [
		{
			id: 'Via3',
			lower: 'Metal3',
			upper: 'Metal4',
			ohmPerCut: 9,
			cutsPerUm2: cutsPerUm2(0.19, 0.22),
			maxMaPerCut: 0.4
		},
		{
			id: 'Via4',
			lower: 'Metal4',
			upper: 'Metal5',
			ohmPerCut: 9,
			cutsPerUm2: cutsPerUm2(0.19, 0.22),
			maxMaPerCut: 0.4
		},
		{
			id: 'TopVia1',
			lower: 'Metal5',
			upper: 'TopMetal1',
			ohmPerCut: 2.2,
			cutsPerUm2: cutsPerUm2(0.42, 0.42),
			maxMaPerCut: 1.4
		},
		{
			id: 'TopVia2',
			lower: 'TopMetal1',
			upper: 'TopMetal2',
			ohmPerCut: 1.1,
			cutsPerUm2: cutsPerUm2(0.9, 1.06),
			maxMaPerCut: 10
		}
	]
};
