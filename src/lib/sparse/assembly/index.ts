export { DENSE_SCRATCH_BYTES } from './dense';
export { DISSECTION_BYTES, DISSECTION_BYTES_PER_NODE, orderByPlace } from './dissection';
export { bindNumeric, bindSymbolic } from './factor';
export { bindStacks, factoriseRange } from './multifrontal';
export {
	backward,
	backwardLanes,
	dotProduct,
	forward,
	forwardLanes,
	forwardPath,
	LANES
} from './substitution';
