import type { Bounds } from '#lib/geometry/index.ts';

/** One regulated net's part of the invented die. */
export interface Domain {
	readonly net: string;
	readonly name: string;
	readonly volts: number;
	readonly area: Bounds;
	/** Names of its blocks, row by row from the lower left. */
	readonly blocks: readonly (readonly string[])[];
	readonly cell: string;
	/** Regulators in each channel, from the bottom. */
	readonly perChannel: readonly number[];
	/** Current of the whole domain by mode, A. */
	readonly amps: Readonly<Record<string, number>>;
	/** How its blocks follow the voltage they see. */
	readonly voltageExponent: number;
}

/** Height of the horizontal channels between block rows, where the regulators stand, um. */
export const CHANNEL_UM = 120;
/** Gap between block columns, um. */
export const COLUMN_GAP_UM = 40;

export const domains: readonly Domain[] = [
	{
		net: 'vdd_core',
		name: 'Core rail',
		volts: 1.2,
		area: { minX: 150, minY: 150, maxX: 3630, maxY: 4850 },
		blocks: [
			['fetch', 'decode', 'rename'],
			['alu0', 'alu1', 'muldiv'],
			['lsu', 'l1d', 'l1i'],
			['noc', 'dma', 'secure']
		],
		cell: 'weir-l',
		perChannel: [10, 10, 8, 10, 10],
		amps: { sleep: 0.035, typical: 0.95, burst: 1.72, memtest: 0.6 },
		voltageExponent: 0
	},
	{
		net: 'vdd_mem',
		name: 'Memory rail',
		volts: 1.1,
		area: { minX: 3750, minY: 2610, maxX: 5850, maxY: 4850 },
		blocks: [
			['sram0', 'sram1'],
			['sram2', 'sram3'],
			['rom', 'cachetag']
		],
		cell: 'weir-s',
		perChannel: [6, 6, 6, 6],
		amps: { sleep: 0.012, typical: 0.26, burst: 0.44, memtest: 0.58 },
		voltageExponent: 1
	},
	{
		net: 'vdd_dsp',
		name: 'Signal rail',
		volts: 1,
		area: { minX: 3750, minY: 150, maxX: 5850, maxY: 2490 },
		blocks: [
			['mac0', 'mac1'],
			['fft', 'fir'],
			['cordic', 'stream']
		],
		cell: 'weir-l',
		perChannel: [6, 6, 6, 6],
		amps: { sleep: 0.008, typical: 0.5, burst: 0.98, memtest: 0.1 },
		voltageExponent: 0
	}
];

/** Rectangles of a domain's blocks between its channels, keyed like `Domain.blocks`. */
export function blockBounds(domain: Domain): Bounds[][] {
	const { area, blocks } = domain;
	const rows = blocks.length;
	const height = Math.floor((area.maxY - area.minY - (rows + 1) * CHANNEL_UM) / rows);
	return blocks.map((names, row) => {
		const width = Math.floor(
			(area.maxX - area.minX - (names.length + 1) * COLUMN_GAP_UM) / names.length
		);
		const minY = area.minY + CHANNEL_UM + row * (height + CHANNEL_UM);
		return names.map((_, column) => {
			const minX = area.minX + COLUMN_GAP_UM + column * (width + COLUMN_GAP_UM);
			return { minX, minY, maxX: minX + width, maxY: minY + height };
		});
	});
}

/** Lower edges of the channels, from the bottom, um. */
export function channelFloorsUm(domain: Domain): number[] {
	const rows = blockBounds(domain);
	return [domain.area.minY, ...rows.map((row) => row[0].maxY)];
}
