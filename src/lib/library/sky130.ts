import { cutsPerUm2, type RailStack } from './stack.ts';

/**
 * SKY130 from met1 up. Sheet and via resistances from the extraction table, thickness and current
 * limits (direct current, 90 C) from the kit's technology file, cut sizes from the periphery rules.
 * The kit states no temperature coefficients: they stay 0.
 */
export const sky130: RailStack = {
	id: 'sky130',
	version: 1,
	name: 'SKY130, met1 to met5',
	source:
		'SkyWater SKY130 PDK documentation, rules/rcx/resistance-values.tsv and rules/periphery; limits from the sky130_fd_sc_hd nominal technology LEF (open_pdks)',
	licence: 'Apache-2.0',
	layers: [
		{ id: 'met1', direction: 'horizontal', sheetOhm: 0.125, thicknessUm: 0.36, maxMaPerUm: 2.8 },
		{ id: 'met2', direction: 'vertical', sheetOhm: 0.125, thicknessUm: 0.36, maxMaPerUm: 2.8 },
		{ id: 'met3', direction: 'horizontal', sheetOhm: 0.047, thicknessUm: 0.845, maxMaPerUm: 6.8 },
		{ id: 'met4', direction: 'vertical', sheetOhm: 0.047, thicknessUm: 0.845, maxMaPerUm: 6.8 },
		{ id: 'met5', direction: 'horizontal', sheetOhm: 0.029, thicknessUm: 1.26, maxMaPerUm: 10.17 }
	],
	vias: [
		{
			id: 'via',
			lower: 'met1',
			upper: 'met2',
			ohmPerCut: 4.5,
			cutsPerUm2: cutsPerUm2(0.15, 0.17),
			maxMaPerCut: 0.29
		},
		{
			id: 'via2',
			lower: 'met2',
			upper: 'met3',
			ohmPerCut: 3.41,
			cutsPerUm2: cutsPerUm2(0.2, 0.2),
			maxMaPerCut: 0.48
		},
		{
			id: 'via3',
			lower: 'met3',
			upper: 'met4',
			ohmPerCut: 3.41,
			cutsPerUm2: cutsPerUm2(0.2, 0.2),
			maxMaPerCut: 0.48
		},
		{
			id: 'via4',
			lower: 'met4',
			upper: 'met5',
			ohmPerCut: 0.38,
			cutsPerUm2: cutsPerUm2(0.8, 0.8),
			maxMaPerCut: 2.49
		}
	]
};
