import { cutsPerUm2, type RailStack } from './stack.ts';

/** Activation energy and exponent with which the manual's limits move with temperature (table 14.3). */
const black = { emActivationEv: 0.7, emExponent: 2, emRefC: 110 };

/**
 * GF180MCU from Metal1 to the 9k top metal. Sheet resistances are the middle of the published
 * ranges; current limits are those at 110 C; via cuts at the spacing of arrays from 4 x 4.
 * The kit's temperature coefficients are not in these tables: they stay 0.
 */
export const gf180mcu: RailStack = {
	id: 'gf180mcu',
	version: 1,
	name: 'GF180MCU, Metal1 to top metal 9k',
	source:
		'GlobalFoundries GF180MCU interconnect specification, sheet rho table; electrical specification 5.2 (typical); design manual 14.2.2, tables 14.3 and 14.4 (110 C)',
	licence: 'Apache-2.0',
	layers: [
		{
			id: 'Metal1',
			direction: 'horizontal',
			sheetOhm: 0.09,
			thicknessUm: 0.55,
			maxMaPerUm: 1,
			...black
		},
		{
			id: 'Metal2',
			direction: 'vertical',
			sheetOhm: 0.09,
			thicknessUm: 0.55,
			maxMaPerUm: 1,
			...black
		},
		{
			id: 'Metal3',
			direction: 'horizontal',
			sheetOhm: 0.09,
			thicknessUm: 0.55,
			maxMaPerUm: 1,
			...black
		},
		{
			id: 'Metal4',
			direction: 'vertical',
			sheetOhm: 0.09,
			thicknessUm: 0.55,
			maxMaPerUm: 1,
			...black
		},
		{
			id: 'MetalTop',
			direction: 'horizontal',
			sheetOhm: 0.04,
			thicknessUm: 1.003,
			maxMaPerUm: 1.8,
			...black
		}
	],
	vias: [
		{ id: 'Via1', lower: 'Metal1', upper: 'Metal2' },
		{ id: 'Via2', lower: 'Metal2', upper: 'Metal3' },
		{ id: 'Via3', lower: 'Metal3', upper: 'Metal4' },
		{ id: 'Via4', lower: 'Metal4', upper: 'MetalTop' }
	].map((pair) => ({
		...pair,
		ohmPerCut: 4.5,
		cutsPerUm2: cutsPerUm2(0.26, 0.36),
		maxMaPerCut: 0.28
	}))
};
