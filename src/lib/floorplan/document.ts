/**
 * The floorplan document. Nouns used throughout the project:
 *
 * - die: the outline that everything stands on
 * - net: an input rail, a regulated rail, or the ground
 * - strap: a metal line of one net; a pattern describes many parallel straps
 * - via: the connection of two crossing straps of one net
 * - feed: a bump or pad that ties an input or ground net to the outside
 * - cell: a kind of regulator; regulator: one placed unit of a cell
 * - block: a load; mode: which currents the blocks draw; corner: temperature, metal and cells
 * - keep-out: where regulators or straps may not stand
 * - limit: a bound on a result; finding: a limit that a result breaks
 */
import { z } from 'zod';
import { blockSchema } from './block.ts';
import { cellSchema, libraryReferenceSchema } from './cell.ts';
import { cornerSchema, modeSchema } from './conditions.ts';
import { feedSchema } from './feed.ts';
import { keepoutSchema } from './keepout.ts';
import { layerSchema, viaSchema } from './layer.ts';
import { limitsSchema } from './limits.ts';
import { netSchema } from './net.ts';
import { lengthUmSchema, nameSchema, outlineSchema, pointUmSchema } from './primitives.ts';
import { regulatorSchema } from './regulator.ts';
import { strapSchema } from './strap.ts';

export const FLOORPLAN_FORMAT = 'manyweir-floorplan';
export const FLOORPLAN_VERSION = 1;

/** The lists of a document whose items have an `id`. */
export const ITEM_LISTS = [
	'layers',
	'vias',
	'nets',
	'straps',
	'feeds',
	'cells',
	'regulators',
	'blocks',
	'keepouts',
	'modes',
	'corners'
] as const;
export type ItemList = (typeof ITEM_LISTS)[number];

/** Least and most items of each list. */
export const LIST_LENGTHS = {
	layers: [1, 64],
	vias: [0, 4096],
	nets: [1, 256],
	straps: [0, 20_000],
	feeds: [0, 200_000],
	cells: [0, 1_000],
	regulators: [0, 20_000],
	blocks: [0, 20_000],
	keepouts: [0, 20_000],
	modes: [1, 256],
	corners: [1, 256]
} as const satisfies Record<ItemList, readonly [least: number, most: number]>;

export const dieSchema = z.strictObject({ outline: outlineSchema });

/** The grid on which regulator origins may stand. */
export const sitesSchema = z.strictObject({
	originUm: pointUmSchema,
	pitchUm: z.tuple([lengthUmSchema, lengthUmSchema])
});

/** The library stack that `layers` and `vias` were copied from. */
export const stackReferenceSchema = libraryReferenceSchema.extend({
	name: nameSchema.optional(),
	/** The published source of its numbers, for reports. */
	source: z.string().max(1000).optional()
});

function listOf<S extends z.ZodType>(item: S, list: ItemList): z.ZodArray<S> {
	const [least, most] = LIST_LENGTHS[list];
	return z.array(item).min(least).max(most);
}

export const floorplanSchema = z.strictObject({
	format: z.literal(FLOORPLAN_FORMAT),
	version: z.literal(FLOORPLAN_VERSION),
	name: nameSchema.optional(),
	die: dieSchema,
	sites: sitesSchema.optional(),
	stack: stackReferenceSchema.optional(),
	layers: listOf(layerSchema, 'layers'),
	vias: listOf(viaSchema, 'vias').default([]),
	nets: listOf(netSchema, 'nets'),
	straps: listOf(strapSchema, 'straps'),
	feeds: listOf(feedSchema, 'feeds').default([]),
	cells: listOf(cellSchema, 'cells').default([]),
	regulators: listOf(regulatorSchema, 'regulators').default([]),
	blocks: listOf(blockSchema, 'blocks').default([]),
	keepouts: listOf(keepoutSchema, 'keepouts').default([]),
	modes: listOf(modeSchema, 'modes').default(() => [{ id: 'default' }]),
	corners: listOf(cornerSchema, 'corners').default(() => [
		{ id: 'nominal', temperatureC: 25, metalScale: 1, loadScale: 1, outputOhmScale: 1 }
	]),
	limits: limitsSchema.default(() => ({})),
	mesh: z.strictObject({ maxSegmentUm: lengthUmSchema.optional() }).default(() => ({}))
});

/** A parsed document: every default filled in, every length on the nanometre grid. */
export type Floorplan = z.infer<typeof floorplanSchema>;
/** A document as people write it, with defaults left out. */
export type FloorplanInput = z.input<typeof floorplanSchema>;
export type Sites = z.infer<typeof sitesSchema>;

export type ItemOf<L extends ItemList> = Floorplan[L][number];

/** The schema of the items of a list. */
export function itemSchemaOf(list: ItemList): z.ZodObject {
	const wrapped = floorplanSchema.shape[list];
	const array = wrapped instanceof z.ZodDefault ? wrapped.unwrap() : wrapped;
	return array.element;
}
