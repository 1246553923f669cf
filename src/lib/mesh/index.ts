export { meshFloorplan } from './mesh.ts';
export { resistancesAt } from './resistors.ts';
export { senseProbes } from './sense.ts';
export type { SenseProbe } from './sense.ts';
export { RESISTOR_SEGMENT, RESISTOR_VIA } from './network.ts';
export type {
	MeshResult,
	ModelProblem,
	ModelWarning,
	Network,
	NetworkFeeds,
	NetworkLoads,
	NetworkNet,
	NetworkNodes,
	NetworkRegulators,
	NetworkResistors,
	NetworkShort,
	ResistancesResult
} from './network.ts';
