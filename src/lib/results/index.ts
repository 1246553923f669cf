export {
	FINDING_KINDS,
	FINDING_LISTS,
	REGULATOR_STATES,
	RESULT_FORMAT,
	RESULT_VERSION,
	resultFileSchema
} from './schema.ts';
export type {
	BlockResult,
	FeedResult,
	Finding,
	FindingKind,
	NetResult,
	PowerResult,
	RegulatorResult,
	ResultFile,
	ResultWarning,
	Spot,
	StrapLoad,
	ViaLoad
} from './schema.ts';
export { decodeDropMap, encodeDropMap } from './drop-map.ts';
export type { DropMap } from './drop-map.ts';
export { buildDropMap } from './rasterise.ts';
export { buildResult } from './build-result.ts';
export type { ResultContext } from './build-result.ts';
export { blackFactor } from './metal-load.ts';
export { nodesCsv } from './nodes-csv.ts';
