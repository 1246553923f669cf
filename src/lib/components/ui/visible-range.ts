/** Rows of a long table that are in view, and the space that the others take, px. */
export interface VisibleRange {
	readonly first: number;
	readonly last: number;
	readonly before: number;
	readonly after: number;
}

/** Tables up to this long are drawn whole. */
const WHOLE_ROWS = 200;
/** Rows drawn above and below the view, so that scrolling shows no gaps. */
const MARGIN_ROWS = 12;

/** Which of `count` rows of one height to draw. */
export function visibleRange(
	count: number,
	scrollTop: number,
	viewHeight: number,
	rowHeight: number
): VisibleRange {
	if (count <= WHOLE_ROWS) return { first: 0, last: count, before: 0, after: 0 };
	const first = Math.max(0, Math.floor(scrollTop / rowHeight) - MARGIN_ROWS);
	const last = Math.min(count, Math.ceil((scrollTop + viewHeight) / rowHeight) + MARGIN_ROWS);
	return { first, last, before: first * rowHeight, after: (count - last) * rowHeight };
}
