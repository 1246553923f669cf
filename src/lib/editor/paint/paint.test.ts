import { describe, expect, it } from 'vitest';
import type { DropMap } from '#lib/results/index.ts';
import { recordingContext } from '../../../../tests/support/recording-context.ts';
import { smallPlan } from '../../../../tests/support/editor-driver.ts';
import { SceneIndex } from '../scene-index.ts';
import { keyOf } from '../selection.ts';
import { everythingVisible } from '../visibility.ts';
import { limitContour, mapPixels, mapRange, mapValueAt } from './map-image.ts';
import { paintSheet, paintStraps } from './paint-base.ts';
import { paintMaps } from './paint-map.ts';
import { paintMarked, paintSpot } from './paint-marks.ts';
import { paintBlock, paintFeed } from './paint-objects.ts';
import { paintRegulator } from './paint-regulator.ts';
import { paintOverlay } from './paint-overlay.ts';
import { paintScene } from './paint-scene.ts';
import { strapLines } from './strap-lines.ts';
import type { PaintTheme } from './theme.ts';
import { readTheme } from './theme.ts';

/** Every colour is its own name. */
const theme: PaintTheme = readTheme((property) => property.slice(2));
const plan = smallPlan();
const scene = new SceneIndex(plan);
/** The whole die of 1000 um x 800 um, one pixel to the micrometre. */
const camera = { centreXUm: 500, centreYUm: 400, pxPerUm: 1, widthPx: 1000, heightPx: 800 };
const everything = everythingVisible(plan);
const far = { ...camera, pxPerUm: 0.02 };
const bounds = { minX: 100, minY: 100, maxX: 140, maxY: 120 };

/** Two rows of three cells of 10 um; one has no rail. */
const map: DropMap = {
	columns: 3,
	rows: 2,
	originXNm: 0,
	originYNm: 0,
	cellNm: 10_000,
	dropV: Float32Array.from([0, 0.01, 0.02, 0.03, NaN, 0.04]),
	netDropV: new Float32Array(6),
	groundRiseV: new Float32Array(6)
};

describe('the map as an image', () => {
	const wash = Uint8ClampedArray.from({ length: 768 }, (_, i) => Math.floor(i / 3));
	const pixels = mapPixels(map, 'dropV', wash, { min: 0, max: 0.04 });
	const pixelAt = (column: number, rowFromTop: number) => [
		...pixels.subarray(4 * (rowFromTop * 3 + column), 4 * (rowFromTop * 3 + column) + 4)
	];

	it('has the top row of the die first', () => {
		expect(pixelAt(0, 1)).toEqual([0, 0, 0, 255]);
		expect(pixelAt(2, 0)).toEqual([255, 255, 255, 255]);
	});

	it('a cell without a rail is not painted at all, unlike one of 0 V', () => {
		expect(pixelAt(1, 0)).toEqual([0, 0, 0, 0]);
		expect(pixelAt(0, 1)[3]).toBe(255);
	});

	it('the range does not see cells without a rail', () => {
		const range = mapRange([map], 'dropV');
		expect(range.min).toBe(0);
		expect(range.max).toBeCloseTo(0.04);
		expect(mapRange([], 'dropV')).toEqual({ min: 0, max: 0 });
	});

	it('what is read is what is painted', () => {
		expect(mapValueAt(map, 'dropV', 25, 15)).toBeCloseTo(0.04);
		expect(mapValueAt(map, 'dropV', 15, 15)).toBeNull();
	});

	it('the limit runs around the cells beyond it, and around nothing where none is', () => {
		const xs = limitContour(map, 'dropV', 0.035)
			.flat()
			.map(([x]) => x);
		expect(Math.min(...xs)).toBeGreaterThanOrEqual(2);
		expect(limitContour(map, 'dropV', 0.05)).toEqual([]);
	});
});

describe('painting maps', () => {
	const image = {} as CanvasImageSource;

	it('cells keep their edges: nothing is smoothed', () => {
		const { context, calls } = recordingContext();
		paintMaps(context, {
			maps: [{ map, image, contour: null }],
			camera,
			theme,
			isStale: false
		});
		const [drawn] = calls('drawImage');
		expect(drawn.state.imageSmoothingEnabled).toBe(false);
		expect(drawn.state.globalAlpha).toBe(1);
		// 30 um x 20 um from the lower left corner of the die.
		expect(drawn.values).toEqual([image, 0, 780, 30, 20]);
	});

	it('a map of another plan is pale', () => {
		const { context, calls } = recordingContext();
		paintMaps(context, { maps: [{ map, image, contour: null }], camera, theme, isStale: true });
		expect(calls('drawImage')[0].state.globalAlpha).toBeLessThan(0.6);
	});

	it('beyond the limit there is hatching within a line of paper, ink and vermilion', () => {
		const { context, calls } = recordingContext();
		const contour = limitContour(map, 'dropV', 0.035);
		paintMaps(context, { maps: [{ map, image, contour }], camera, theme, isStale: false });
		const colours = calls('stroke').map(({ state }) => state.strokeStyle);
		expect(colours).toEqual(['paper', 'ink', 'vermilion', 'vermilion']);
		expect(calls('clip')).toHaveLength(1);
	});
});

describe('painting sheet and straps', () => {
	it('sites show only where they can be told apart', () => {
		const near = recordingContext();
		paintSheet(near.context, { floorplan: plan, camera: { ...camera, pxPerUm: 4 }, theme });
		const away = recordingContext();
		paintSheet(away.context, { floorplan: plan, camera, theme });
		expect(near.calls('fillRect').length).toBeGreaterThan(100);
		expect(away.calls('fillRect')).toEqual([]);
	});

	it('a pattern is one path, whatever the number of its straps', () => {
		const { context, calls } = recordingContext();
		const lines = strapLines(plan);
		paintStraps(context, {
			lines,
			camera: { ...camera, pxPerUm: 0.5 },
			theme,
			visibility: everything,
			isOverMap: false
		});
		expect(calls('stroke')).toHaveLength(2);
		// 16 horizontal and 20 vertical lines on a die of 800 um x 1000 um.
		expect(calls('lineTo')).toHaveLength(36);
	});

	it('from afar only some lines are drawn, and fainter', () => {
		const near = recordingContext();
		const away = recordingContext();
		const parts = { lines: strapLines(plan), theme, visibility: everything, isOverMap: false };
		paintStraps(near.context, { ...parts, camera: { ...camera, pxPerUm: 0.5 } });
		paintStraps(away.context, { ...parts, camera: far });
		expect(away.calls('lineTo').length).toBeLessThan(near.calls('lineTo').length / 2);
		const alpha = ({ calls }: typeof near) => Number(calls('stroke')[0].state.globalAlpha);
		expect(alpha(away)).toBeLessThan(alpha(near));
	});

	it('from near straps are bands of their true width, and only those in view', () => {
		const { context, calls } = recordingContext();
		paintStraps(context, {
			lines: strapLines(plan),
			camera: { ...camera, pxPerUm: 10, centreXUm: 20, centreYUm: 25 },
			theme,
			visibility: everything,
			isOverMap: false
		});
		// 100 um x 80 um around (20, 25): centre lines at 25 um each way; those at 75 um are outside.
		expect(calls('rect')).toHaveLength(2);
		expect(calls('rect')[0].values[3]).toBeCloseTo(40);
	});

	it('over a map they are fainter; hidden nets and layers are not drawn', () => {
		const parts = { lines: strapLines(plan), theme, camera };
		const plain = recordingContext();
		paintStraps(plain.context, { ...parts, visibility: everything, isOverMap: false });
		const over = recordingContext();
		paintStraps(over.context, {
			...parts,
			visibility: { ...everything, layers: new Set(['M1']) },
			isOverMap: true
		});
		expect(over.calls('stroke')).toHaveLength(1);
		expect(Number(over.calls('stroke')[0].state.globalAlpha)).toBeLessThan(
			Number(plain.calls('stroke')[0].state.globalAlpha)
		);
	});
});

describe('painting regulators', () => {
	const base = { id: 'R1', bounds, isEnabled: true, isFixed: false, isIllegal: false };

	/** What is drawn of a regulator, as text. */
	function drawn(changes: object): string {
		const recording = recordingContext();
		paintRegulator(
			{ context: recording.context, camera, theme },
			{ ...base, result: null, ...changes }
		);
		return JSON.stringify(
			recording.recorded.map(({ call, values, state }) => [call, values, state])
		);
	}

	it('each state has a picture of its own', () => {
		const states = (['regulating', 'limited', 'idle', 'dropout'] as const).map((state) =>
			drawn({ result: { state, loadFraction: 0.5 } })
		);
		const pictures = [...states, drawn({ isEnabled: false }), drawn({})];
		expect(new Set(pictures).size).toBe(pictures.length);
	});

	it('and it differs by lines, not by colour alone', () => {
		const shapes = (['regulating', 'limited', 'idle', 'dropout'] as const).map((state) => {
			const { context, recorded } = recordingContext();
			const result = { state, loadFraction: 0.5 };
			paintRegulator({ context, camera, theme }, { ...base, result });
			return JSON.stringify(recorded.map(({ call, values }) => [call, values]));
		});
		expect(new Set(shapes).size).toBe(4);
	});

	it.each([
		[0, 0],
		[0.5, 0.5 / 1.12],
		[1, 1 / 1.12],
		[3, 1]
	])('a load of %s of the rating fills %s of the height', (loadFraction, share) => {
		const { context, calls } = recordingContext();
		const result = { state: 'regulating' as const, loadFraction };
		paintRegulator({ context, camera, theme }, { ...base, result });
		const gauge = calls('fillRect').find(({ state }) => state.fillStyle === 'brass-fill');
		expect(gauge?.values[3]).toBeCloseTo(20 * share);
	});

	it('fixed and illegal ones show it by a corner and by hatching', () => {
		expect(drawn({ isFixed: true })).not.toBe(drawn({}));
		const { context, calls } = recordingContext();
		paintRegulator({ context, camera, theme }, { ...base, result: null, isIllegal: true });
		expect(calls('clip')).toHaveLength(1);
		expect(calls('strokeRect')[0].state.strokeStyle).toBe('vermilion');
	});
});

describe('painting the rest', () => {
	it('a block has its name and its current in the mode on a slip of paper', () => {
		const { context, calls } = recordingContext();
		const [cpu] = plan.blocks;
		const box = { minX: 100, minY: 200, maxX: 500, maxY: 600 };
		paintBlock({ context, camera, theme }, cpu, box, 'default');
		expect(calls('fillText').map(({ values }) => values[0])).toEqual(['cpu', '50 mA']);
		expect(calls('fillRect')[0].state.fillStyle).toBe('paper');
	});

	it('the slip stays in sight while its block is', () => {
		const { context, calls } = recordingContext();
		const [cpu] = plan.blocks;
		const box = { minX: 100, minY: 200, maxX: 500, maxY: 600 };
		paintBlock({ context, camera: { ...camera, centreXUm: 800 }, theme }, cpu, box, 'default');
		expect(calls('fillRect')[0].values[0]).toBe(0.5);
	});

	it('a name that does not fit is cut short, and left out where too little is left', () => {
		const texts = (widthUm: number, name = 'instruction cache') => {
			const { context, calls } = recordingContext();
			const block = { ...plan.blocks[0], name };
			const box = { minX: 0, minY: 0, maxX: widthUm, maxY: 100 };
			paintBlock({ context, camera, theme }, block, box, 'default');
			return calls('fillText').map(({ values }) => values[0]);
		};
		// Room for 58 px beside the padding: nine letters of 6 px and the sign of omission is one too many.
		expect(texts(70)).toEqual(['instruct…']);
		expect(texts(20)).toEqual([]);
		// The end of a path tells more than its beginning.
		expect(texts(70, 'memories.sram2')).toEqual(['sram2']);
	});

	it('bumps of an input are rings, of the ground discs', () => {
		const ring = recordingContext();
		paintFeed({ context: ring.context, camera, theme }, plan.feeds[0], false);
		const disc = recordingContext();
		paintFeed({ context: disc.context, camera, theme }, plan.feeds[0], true);
		expect([ring.calls('stroke').length, ring.calls('fill').length]).toEqual([1, 0]);
		expect([disc.calls('stroke').length, disc.calls('fill').length]).toEqual([0, 1]);
	});

	it('a mark is a double line: paper beneath, ink above', () => {
		const { context, calls } = recordingContext();
		paintMarked({ context, camera, theme }, bounds, true);
		expect(calls('stroke').map(({ state }) => state.strokeStyle)).toEqual(['paper', 'ink']);
	});

	it('a spot beyond its limit has a second ring', () => {
		const kept = recordingContext();
		paintSpot({ context: kept.context, camera, theme }, 1, 500, 400, false);
		const broken = recordingContext();
		paintSpot({ context: broken.context, camera, theme }, 1, 500, 400, true);
		expect(kept.calls('arc')).toHaveLength(1);
		expect(broken.calls('arc')).toHaveLength(2);
	});

	it('a scene paints what is in view, from below to above, and leaves out hidden kinds', () => {
		const paint = (visibility: typeof everything) => {
			const { context, calls } = recordingContext();
			paintScene(
				{ context, camera, theme },
				{
					floorplan: plan,
					shown: scene.inView({ minX: 0, minY: 0, maxX: 450, maxY: 800 }),
					visibility,
					modeId: 'default',
					results: new Map(),
					problems: new Map(),
					spots: []
				}
			);
			return calls('strokeRect').length;
		};
		// Four regulators stand there; blocks and keep-outs are outlines.
		expect(paint(everything)).toBe(4);
		expect(paint({ ...everything, lists: { ...everything.lists, regulators: false } })).toBe(0);
	});

	it('what is dragged is shown where it would be', () => {
		const { context, calls } = recordingContext();
		const key = keyOf({ list: 'regulators', id: 'R1' });
		paintOverlay(
			{ context, camera, theme },
			{
				floorplan: plan,
				overlay: {
					drag: { keys: new Set([key]), dxUm: 50, dyUm: 10, reasons: new Map(), guides: [] }
				},
				selection: new Set([key]),
				hovered: null,
				boundsOf: (one) => scene.boundsOf(one)
			}
		);
		// R1 is 40 um x 20 um at (100, 100): its top at y 130 is 270 px below the canvas's middle.
		expect(calls('strokeRect')[0].values).toEqual([150, 670, 40, 20]);
		expect(calls('rect')).toHaveLength(1);
	});
});
