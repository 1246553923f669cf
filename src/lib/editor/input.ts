import type { ScreenPoint } from './points.ts';

/** A pointer event as tools see it. */
export interface PointerInput {
	readonly point: ScreenPoint;
	/** Adds to the selection instead of replacing it. */
	readonly isAdding: boolean;
	/** Suspends snapping. */
	readonly isFree: boolean;
}

/** One state of a tool: a small machine moves from state to state as the pointer does. */
export interface ToolState {
	/** `tool.state`, for tests and for the pointer's shape. */
	readonly name: string;
	pointerDown?(input: PointerInput): void;
	pointerMove?(input: PointerInput): void;
	pointerUp?(input: PointerInput): void;
	/** Escape, a right click, or the system took the pointer away: everything as before. */
	cancel?(): void;
}
