import type { FloorplanInput } from '#lib/floorplan/index.ts';
import { demoCells } from './cells.ts';
import { CHANNEL_UM, channelFloorsUm, type Domain } from './domains.ts';

type RegulatorInput = NonNullable<FloorplanInput['regulators']>[number];

/** Pitch of the sites on which regulators stand, um. */
export const SITE_UM = 5;

/**
 * Units whose set points the story bends, so that every state can be seen: one trimmed high that
 * ends at its rating, one trimmed low that the others starve, one taken out of service.
 */
const STORY: Readonly<Record<string, Partial<RegulatorInput>>> = {
	core_2_4: { offsetV: 0.009 },
	mem_2_3: { offsetV: -0.03 },
	dsp_3_5: { enabled: false }
};

/** The units that the story bends. */
export const storyRegulators: readonly string[] = Object.keys(STORY);

function onSite(um: number): number {
	return Math.round(um / SITE_UM) * SITE_UM;
}

/** The domain's regulators: evenly along its channels, on sites, with small trimmed offsets. */
export function domainRegulators(domain: Domain, random: () => number): RegulatorInput[] {
	const cell = demoCells.find((candidate) => candidate.id === domain.cell);
	if (!cell) throw new Error(`demo cell ${domain.cell} is not defined`);
	const { minX, maxX } = domain.area;
	const floors = channelFloorsUm(domain);
	const prefix = domain.net.replace('vdd_', '');
	return domain.perChannel.flatMap((count, channel) => {
		const pitchUm = (maxX - minX) / count;
		return Array.from({ length: count }, (_, column): RegulatorInput => {
			const id = `${prefix}_${channel}_${column}`;
			const offsetMv = Math.round((random() - 0.5) * 30) / 10;
			return {
				id,
				cell: cell.id,
				input: 'vin',
				output: domain.net,
				xUm: onSite(minX + (column + 0.5) * pitchUm - cell.widthUm / 2),
				yUm: onSite(floors[channel] + (CHANNEL_UM - cell.heightUm) / 2),
				offsetV: offsetMv / 1000,
				...STORY[id]
			};
		});
	});
}
