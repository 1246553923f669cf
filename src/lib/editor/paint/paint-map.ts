import type { DropMap } from '#lib/results/index.ts';
import type { Camera } from '../camera.ts';
import { toScreen } from '../camera.ts';
import { diePoint } from '../points.ts';
import type { ContourRings } from './map-image.ts';
import type { PaintTheme } from './theme.ts';

/** A map made ready: its cells as an image, and where it passes the limit. */
export interface PreparedMap {
	readonly map: DropMap;
	readonly image: CanvasImageSource;
	/** Null where nothing limits what is shown. */
	readonly contour: ContourRings | null;
}

/** Distance between the hatching lines beyond the limit, px. */
const HATCH_PX = 7;

const STALE_ALPHA = 0.45;

const NM_PER_UM = 1000;

/** Screen coordinates of a place in cell units. */
function cellPoint(
	{ originXNm, originYNm, cellNm }: DropMap,
	camera: Camera,
	x: number,
	y: number
) {
	return toScreen(
		camera,
		diePoint((originXNm + x * cellNm) / NM_PER_UM, (originYNm + y * cellNm) / NM_PER_UM)
	);
}

/** The wash over the die; cells keep their edges, since values between them are not known. */
export function paintMaps(
	context: CanvasRenderingContext2D,
	{
		maps,
		camera,
		theme,
		isStale
	}: { maps: readonly PreparedMap[]; camera: Camera; theme: PaintTheme; isStale: boolean }
): void {
	context.save();
	// A map of another drawing than this one is pale.
	context.globalAlpha = isStale ? STALE_ALPHA : 1;
	context.imageSmoothingEnabled = false;
	for (const { map, image } of maps) {
		const [left, top] = cellPoint(map, camera, 0, map.rows);
		const [right, bottom] = cellPoint(map, camera, map.columns, 0);
		context.drawImage(image, left, top, right - left, bottom - top);
	}
	context.restore();
	for (const { map, contour } of maps) {
		if (contour && contour.length > 0) paintLimit(context, map, contour, camera, theme);
	}
}

/**
 * Widths of the lines of the limit, px, each over the one before: of paper and ink one stands out
 * from every colour of the map by 3:1, vermilion says what it is.
 */
const LIMIT_LINES = [
	['paper', 5],
	['ink', 3.2],
	['vermilion', 1.6]
] as const;

/** The limit as a line, and hatching beyond it: the breach shows without colour. */
function paintLimit(
	context: CanvasRenderingContext2D,
	map: DropMap,
	contour: ContourRings,
	camera: Camera,
	theme: PaintTheme
): void {
	let minX = Infinity;
	let minY = Infinity;
	let maxX = -Infinity;
	let maxY = -Infinity;
	context.save();
	context.beginPath();
	for (const ring of contour) {
		ring.forEach(([x, y], i) => {
			const [px, py] = cellPoint(map, camera, x, y);
			minX = Math.min(minX, px);
			minY = Math.min(minY, py);
			maxX = Math.max(maxX, px);
			maxY = Math.max(maxY, py);
			if (i === 0) context.moveTo(px, py);
			else context.lineTo(px, py);
		});
		context.closePath();
	}
	for (const [colour, width] of LIMIT_LINES) {
		context.strokeStyle = theme[colour];
		context.lineWidth = width;
		context.stroke();
	}
	context.clip('evenodd');
	context.beginPath();
	const height = maxY - minY;
	for (let x = Math.floor((minX - height) / HATCH_PX) * HATCH_PX; x < maxX; x += HATCH_PX) {
		context.moveTo(x, maxY);
		context.lineTo(x + height, minY);
	}
	context.strokeStyle = theme.vermilion;
	context.lineWidth = 1;
	context.stroke();
	context.restore();
}
