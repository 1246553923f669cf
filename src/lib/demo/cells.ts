import type { FloorplanInput } from '#lib/floorplan/index.ts';

/** Two invented regulator cells: a large one for logic, a small one for memories. */
export const demoCells: NonNullable<FloorplanInput['cells']> = [
	{
		id: 'weir-l',
		name: 'Large weir',
		widthUm: 120,
		heightUm: 60,
		outputOhm: 0.22,
		onOhm: 1.1,
		maxA: 0.06,
		minA: 0.0001,
		quiescentA: 0.00012,
		offsetSigmaV: 0.0025,
		pins: { input: [20, 30], output: [100, 30], ground: [60, 10] },
		loop: {
			gainAtRef: 45,
			refA: 0.03,
			internalPolesHz: [1.8e9],
			outputFarad: 2e-9,
			minPhaseDeg: 50
		}
	},
	{
		id: 'weir-s',
		name: 'Small weir',
		widthUm: 80,
		heightUm: 50,
		outputOhm: 0.38,
		onOhm: 2,
		maxA: 0.04,
		minA: 0.0001,
		quiescentA: 0.00007,
		offsetSigmaV: 0.003,
		pins: { input: [15, 25], output: [65, 25], ground: [40, 10] },
		loop: {
			gainAtRef: 40,
			refA: 0.02,
			internalPolesHz: [2.2e9],
			outputFarad: 1.2e-9,
			minPhaseDeg: 50
		}
	}
];
