import {
	floorplanSchema,
	type Floorplan,
	type FloorplanInput,
	type PointUm
} from '#lib/floorplan/index.ts';
import type { Bounds } from '#lib/geometry/index.ts';
import { sg13g2 } from '#lib/library/index.ts';
import { domainBlocks } from './blocks.ts';
import { demoCells } from './cells.ts';
import { domains } from './domains.ts';
import { dieFeeds } from './feeds.ts';
import { seededRandom } from './random.ts';
import { domainRegulators, SITE_UM } from './regulators.ts';

export const DIE_WIDTH_UM = 6000;
export const DIE_HEIGHT_UM = 5000;
/** The seed of the plan that ships. */
export const DEMO_SEED = 20817;

const RAIL_PITCH_UM = 60;
const TOP_PITCH_UM = 120;

function rectangle({ minX, minY, maxX, maxY }: Bounds): PointUm[] {
	return [
		[minX, minY],
		[maxX, minY],
		[maxX, maxY],
		[minX, maxY]
	];
}

/** Rails on Metal4 and Metal5, their ground between them; input and ground side by side on top. */
function demoStraps(pitchScale: number): FloorplanInput['straps'] {
	const rails = domains.flatMap((domain) =>
		(['Metal4', 'Metal5'] as const).map((layer) => ({
			id: `${domain.net}.${layer}`,
			net: domain.net,
			layer,
			pitchUm: RAIL_PITCH_UM * pitchScale,
			widthUm: layer === 'Metal4' ? 14 : 12,
			offsetUm: 15,
			region: rectangle(domain.area)
		}))
	);
	const ground = [
		{ layer: 'Metal4', pitchUm: RAIL_PITCH_UM * pitchScale, widthUm: 14, offsetUm: 45 },
		{ layer: 'Metal5', pitchUm: RAIL_PITCH_UM * pitchScale, widthUm: 12, offsetUm: 45 },
		{ layer: 'TopMetal1', pitchUm: TOP_PITCH_UM * pitchScale, widthUm: 24, offsetUm: 90 },
		{ layer: 'TopMetal2', pitchUm: TOP_PITCH_UM * pitchScale, widthUm: 28, offsetUm: 90 }
	].map((strap) => ({ id: `gnd.${strap.layer}`, net: 'gnd', ...strap }));
	const input = [
		{ layer: 'TopMetal1', pitchUm: TOP_PITCH_UM * pitchScale, widthUm: 24, offsetUm: 30 },
		{ layer: 'TopMetal2', pitchUm: TOP_PITCH_UM * pitchScale, widthUm: 28, offsetUm: 30 }
	].map((strap) => ({ id: `vin.${strap.layer}`, net: 'vin', ...strap }));
	return [...rails, ...ground, ...input];
}

/**
 * An invented die of 6 mm x 5 mm: three regulated rails, 24 blocks, 96 regulators of two cells,
 * four modes, three corners, on the published stack of an open process kit. The same seed gives
 * the same plan, to the last digit.
 *
 * @param pitchScale widens the pitch of all straps, for a plan with fewer nodes
 */
export function makeDemoFloorplan(seed: number = DEMO_SEED, pitchScale = 1): Floorplan {
	const random = seededRandom(seed);
	const input: FloorplanInput = {
		format: 'manyweir-floorplan',
		version: 1,
		name: 'Osier hub',
		die: { outline: rectangle({ minX: 0, minY: 0, maxX: DIE_WIDTH_UM, maxY: DIE_HEIGHT_UM }) },
		sites: { originUm: [0, 0], pitchUm: [SITE_UM, SITE_UM] },
		stack: { id: sg13g2.id, version: sg13g2.version, name: sg13g2.name, source: sg13g2.source },
		layers: [...sg13g2.layers],
		vias: [...sg13g2.vias],
		nets: [
			{ id: 'vin', name: 'Input rail', kind: 'input', volts: 1.5 },
			...domains.map((domain) => ({
				id: domain.net,
				name: domain.name,
				kind: 'regulated' as const,
				volts: domain.volts,
				...(domain.net === 'vdd_dsp'
					? {
							senseLoop: {
								points: [
									{ xUm: 4300, yUm: 700 },
									{ xUm: 5300, yUm: 700, weight: 2 },
									{ xUm: 4800, yUm: 1900 }
								],
								rangeV: 0.02
							}
						}
					: {})
			})),
			{ id: 'gnd', name: 'Ground', kind: 'ground', volts: 0 }
		],
		straps: demoStraps(pitchScale),
		feeds: dieFeeds(DIE_WIDTH_UM, DIE_HEIGHT_UM),
		cells: demoCells,
		regulators: domains.flatMap((domain) => domainRegulators(domain, random)),
		blocks: domains.flatMap((domain) => domainBlocks(domain, random)),
		keepouts: [
			{
				id: 'pll',
				name: 'Clock generator',
				outline: rectangle({ minX: 3640, minY: 2300, maxX: 3740, maxY: 2800 }),
				forbids: ['regulators', 'straps'],
				layers: ['Metal4', 'Metal5']
			},
			{
				id: 'window',
				name: 'Sensor window',
				outline: rectangle({ minX: 0, minY: 4880, maxX: 1500, maxY: 5000 }),
				forbids: ['regulators']
			}
		],
		modes: [
			{ id: 'typical', name: 'Typical use' },
			{ id: 'burst', name: 'Burst, low battery', inputVolts: { vin: 1.254 } },
			{ id: 'memtest', name: 'Memory test' },
			{ id: 'sleep', name: 'Sleep', inputVolts: { vin: 1.45 } }
		],
		corners: [
			{ id: 'nominal', name: 'Nominal, 65 C', temperatureC: 65 },
			{
				id: 'hot-thin',
				name: 'Hot, thin metal',
				temperatureC: 105,
				metalScale: 1.12,
				loadScale: 1.06,
				outputOhmScale: 1.15
			},
			{
				id: 'cold-thick',
				name: 'Cold, thick metal',
				temperatureC: -20,
				metalScale: 0.92,
				loadScale: 0.95,
				outputOhmScale: 0.94
			}
		],
		limits: {
			dropV: 0.038,
			riseV: 0.03,
			regulatorLoad: 0.95,
			belowMinA: 'flag',
			headroomV: 0.004,
			strapLoad: 1,
			viaLoad: 1,
			feedLoad: 0.8,
			sharingSpread: 2,
			spacingUm: 20,
			overrides: { nets: { vdd_mem: { dropV: 0.035 } } }
		},
		mesh: {}
	};
	return floorplanSchema.parse(input);
}
