export type {
	EditsAnswer,
	OutgoingEdit,
	RemoteEdit,
	Schedule,
	SubmitAnswer,
	Transport,
	Unreachable
} from './transport.ts';
export type { EditStorage, StoredEdit, StringStore } from './storage.ts';
export { createEditStorage } from './storage.ts';
export type { Author, ConflictPlace, ConflictReport, RefusalReport } from './held.ts';
export type { SyncChange, SyncOptions, SyncState } from './sync-client.ts';
export { SyncClient } from './sync-client.ts';
