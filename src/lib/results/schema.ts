/**
 * The result file: what one solve of one mode and corner says. Written as JSON, numbers in full
 * double precision. Positions are um rounded to 0.001; lists keep the order of the floorplan file,
 * lists of the worst are sorted by severity with ties by id.
 */
import { z } from 'zod';

export const RESULT_FORMAT = 'manyweir-result';
export const RESULT_VERSION = 1;

const positionUmSchema = z.tuple([z.number(), z.number()]);

/** The lists of a floorplan that a finding or a spot can point into. */
export const FINDING_LISTS = [
	'nets',
	'blocks',
	'regulators',
	'feeds',
	'straps',
	'vias',
	'plan'
] as const;

export const FINDING_KINDS = [
	'drop',
	'rise',
	'collapsed',
	'regulator-load',
	'below-min-current',
	'headroom',
	'strap-load',
	'via-load',
	'feed-load',
	'sharing-spread',
	'placement',
	'short'
] as const;

/** Where a net is weakest, by its own lowest layer. */
export const netWorstSchema = z.object({
	xUm: z.number(),
	yUm: z.number(),
	layer: z.string(),
	/** Block that covers the place, or null where none does. */
	block: z.string().nullable()
});

export const netResultSchema = z.object({
	id: z.string(),
	kind: z.enum(['input', 'regulated', 'ground']),
	/** Volts that drops are counted from: nominal, or the mode's where it sets an input net's. */
	nominalV: z.number(),
	/** Lowest and highest node voltage against 0 V, all layers. */
	minV: z.number(),
	maxV: z.number(),
	/** Largest drop on the lowest layer, V; for the ground net the largest rise above 0 V. */
	worstDropV: z.number(),
	/** The two parts of the worst drop. */
	netDropV: z.number(),
	groundRiseV: z.number(),
	/** Largest supply above nominal on the lowest layer, V; 0 where there is none. */
	worstRiseV: z.number(),
	worst: netWorstSchema,
	/** Current that the net's loads draw, A. */
	loadA: z.number(),
	/** (largest - smallest) / mean of the currents of the net's enabled regulators; null without any. */
	sharingSpread: z.number().nullable(),
	/** Correction of the shared slow loop, V. */
	senseU: z.number().optional(),
	/** Whether the loop holds the mean, or stands at an end of its range. */
	senseState: z.enum(['holding', 'at-range']).optional()
});

export const spotSchema = z.object({
	net: z.string(),
	xUm: z.number(),
	yUm: z.number(),
	layer: z.string(),
	block: z.string().nullable(),
	dropV: z.number(),
	netDropV: z.number(),
	groundRiseV: z.number(),
	/** The limit that holds there and what is left of it (negative: broken), or null without one. */
	limitV: z.number().nullable(),
	marginV: z.number().nullable()
});

export const REGULATOR_STATES = ['regulating', 'limited', 'idle', 'dropout', 'off'] as const;

export const regulatorResultSchema = z.object({
	id: z.string(),
	/** Current into the output net. */
	amps: z.number(),
	/** amps / maxA of the cell. */
	loadFraction: z.number(),
	state: z.enum(REGULATOR_STATES),
	/** Set point against its ground reference: net volts + offset + shared correction. */
	setV: z.number(),
	/** Output pin against 0 V; null for a unit that touches no strap (only when off). */
	outV: z.number().nullable(),
	/** Input pin against 0 V; null for an ideal input. */
	inV: z.number().nullable(),
	/** Ground pin against 0 V. */
	gndV: z.number(),
	/** v_in - v - onOhm * i; null for an ideal input. */
	headroomV: z.number().nullable(),
	lossW: z.number()
});

export const blockResultSchema = z.object({
	id: z.string(),
	net: z.string(),
	/** Current it draws at the voltage it sees. */
	amps: z.number(),
	/** Mean (by share of current) and lowest supply that it sees: net minus local ground. */
	meanV: z.number(),
	minV: z.number(),
	worstDropV: z.number(),
	netDropV: z.number(),
	groundRiseV: z.number(),
	/** Where the worst drop is. */
	atUm: positionUmSchema,
	powerW: z.number(),
	limitV: z.number().nullable(),
	marginV: z.number().nullable(),
	/** Below a tenth of nominal, where the load's law no longer holds. */
	collapsed: z.boolean()
});

export const feedResultSchema = z.object({
	id: z.string(),
	net: z.string(),
	/** Positive from the source into an input net, and from a ground net to 0 V. */
	amps: z.number(),
	/** |amps| / maxA, or null where the feed states no maxA. */
	loadFraction: z.number().nullable()
});

export const strapLoadSchema = z.object({
	strap: z.string(),
	net: z.string(),
	layer: z.string(),
	amps: z.number(),
	limitA: z.number(),
	loadFraction: z.number(),
	fromUm: positionUmSchema,
	toUm: positionUmSchema
});

export const viaLoadSchema = z.object({
	via: z.string(),
	net: z.string(),
	amps: z.number(),
	cuts: z.number(),
	limitA: z.number(),
	loadFraction: z.number(),
	atUm: positionUmSchema
});

const powerPartsSchema = {
	/** Power that reaches the loads. */
	loadW: z.number(),
	/** Loss in the regulators, quiescent currents included. */
	regulatorW: z.number(),
	/** Loss in straps and vias. */
	gridW: z.number(),
	/** Loss in the series resistance of the feeds. */
	feedW: z.number()
};

export const powerSchema = z.object({
	...powerPartsSchema,
	/** Power that the sources deliver: the sum of the four above. */
	inputW: z.number(),
	/** loadW / inputW, or null where the sources deliver nothing. */
	efficiency: z.number().nullable(),
	/** The parts by net; a regulator's loss is counted with its output net. */
	nets: z.array(z.object({ id: z.string(), ...powerPartsSchema }))
});

export const findingSchema = z.object({
	kind: z.enum(FINDING_KINDS),
	/** List of the floorplan in which `subject` is an id. */
	list: z.enum(FINDING_LISTS),
	subject: z.string(),
	/** What else it is about where the subject alone does not tell: net of a via, other strap of a short. */
	partner: z.string().optional(),
	value: z.number(),
	limit: z.number(),
	/** Unit of value and limit; empty for a plain ratio or count. */
	unit: z.enum(['V', 'A', 'um', '']),
	/** What is broken, in a sentence. */
	message: z.string(),
	atUm: positionUmSchema.optional()
});

export const warningSchema = z.object({
	code: z.string(),
	message: z.string(),
	subject: z.string().optional(),
	atUm: positionUmSchema.optional()
});

export const proofSchema = z.object({
	/** Largest Kirchhoff mismatch at any node, A. */
	kclMaxA: z.number(),
	/** The same as a fraction of the total load current. */
	kclRelative: z.number(),
	/** Source power against the sum of all losses and the load power, relative. */
	powerRelative: z.number(),
	/** Every regulator's state agrees with its current and voltages. */
	statesConsistent: z.boolean()
});

export const solverSchema = z.object({
	nodes: z.number(),
	resistors: z.number(),
	method: z.string(),
	newtonSteps: z.number(),
	/** Iterations of the inner linear solves, all Newton steps together. */
	iterations: z.number(),
	/** Relative residual of the last linear solve. */
	residual: z.number(),
	seconds: z.object({
		mesh: z.number(),
		setup: z.number(),
		solve: z.number(),
		total: z.number()
	}),
	/** Peak memory of the process, MB, or null where it is not known. */
	peakMb: z.number().nullable()
});

export const resultFileSchema = z.object({
	format: z.literal(RESULT_FORMAT),
	version: z.literal(RESULT_VERSION),
	floorplan: z.object({ name: z.string().nullable(), sha256: z.string() }),
	mode: z.string(),
	corner: z.string(),
	solver: solverSchema,
	proof: proofSchema,
	nets: z.array(netResultSchema),
	/** Local maxima of drop, net by net in the order of the file, each by severity. */
	spots: z.array(spotSchema),
	regulators: z.array(regulatorResultSchema),
	blocks: z.array(blockResultSchema),
	feeds: z.array(feedResultSchema),
	straps: z.object({ worst: z.array(strapLoadSchema) }),
	vias: z.object({ worst: z.array(viaLoadSchema) }),
	power: powerSchema,
	findings: z.array(findingSchema),
	warnings: z.array(warningSchema)
});

export type ResultFile = z.infer<typeof resultFileSchema>;
export type NetResult = z.infer<typeof netResultSchema>;
export type Spot = z.infer<typeof spotSchema>;
export type RegulatorResult = z.infer<typeof regulatorResultSchema>;
export type BlockResult = z.infer<typeof blockResultSchema>;
export type FeedResult = z.infer<typeof feedResultSchema>;
export type StrapLoad = z.infer<typeof strapLoadSchema>;
export type ViaLoad = z.infer<typeof viaLoadSchema>;
export type PowerResult = z.infer<typeof powerSchema>;
export type Finding = z.infer<typeof findingSchema>;
export type FindingKind = (typeof FINDING_KINDS)[number];
export type ResultWarning = z.infer<typeof warningSchema>;
