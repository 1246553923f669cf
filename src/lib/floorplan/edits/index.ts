export type { Edit, Item, Operation, Property } from './operation.ts';
export { editSchema, operationSchema, partsTouched, PROPERTIES } from './operation.ts';
export type { ApplyResult, Conflict } from './apply.ts';
export { applyOperations } from './apply.ts';
export type { EditDraft, ItemReference, PlacedList } from './actions.ts';
export {
	addItems,
	changeEach,
	changeField,
	describeItems,
	duplicateItems,
	findItem,
	freeId,
	isPlaced,
	moveItems,
	PLACED_LISTS,
	removeItems,
	setProperty
} from './actions.ts';
export { operationsBetween } from './difference.ts';
export type { Referrer } from './references.ts';
export { referrersOf } from './references.ts';
export type { OutlineFrame } from './outline-frame.ts';
export { frameOf, withFrame } from './outline-frame.ts';
