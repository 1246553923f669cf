import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { beside, fit, panBy, toDie, toScreen, viewOf, zoomAt, type Camera } from './camera.ts';
import { diePoint, screenPoint } from './points.ts';

const camera: Camera = {
	centreXUm: 3000,
	centreYUm: 2500,
	pxPerUm: 0.15,
	widthPx: 1280,
	heightPx: 700
};
const pointArbitrary = fc.tuple(
	fc.double({ min: 0, max: 1280, noNaN: true }),
	fc.double({ min: 0, max: 700, noNaN: true })
);

describe('camera', () => {
	it('y goes up on the die and down on the screen', () => {
		expect([...toScreen(camera, diePoint(3000, 2500))]).toEqual([640, 350]);
		expect([...toScreen(camera, diePoint(3100, 2600))]).toEqual([655, 335]);
	});

	it('screen and die are inverse to each other', () => {
		fc.assert(
			fc.property(pointArbitrary, ([x, y]) => {
				const [backX, backY] = toScreen(camera, toDie(camera, screenPoint(x, y)));
				expect(Math.hypot(backX - x, backY - y)).toBeLessThan(1e-6);
			})
		);
	});

	it('twenty zooms keep the die point under the pointer within half a pixel', () => {
		const zooms = fc.array(fc.double({ min: 0.5, max: 2, noNaN: true }), {
			minLength: 20,
			maxLength: 20
		});
		fc.assert(
			fc.property(pointArbitrary, zooms, ([x, y], factors) => {
				const held = toDie(camera, screenPoint(x, y));
				const after = factors.reduce(
					(one, factor) => zoomAt(one, screenPoint(x, y), factor),
					camera
				);
				const [nowX, nowY] = toScreen(after, held);
				expect(Math.hypot(nowX - x, nowY - y)).toBeLessThan(0.5);
			})
		);
	});

	it('zooming at the ends of the range does not move the view', () => {
		let far = camera;
		for (let i = 0; i < 60; i++) far = zoomAt(far, screenPoint(100, 100), 0.5);
		expect(zoomAt(far, screenPoint(100, 100), 0.5)).toEqual(far);
	});

	it('panning moves the picture with the hand', () => {
		const place = diePoint(3100, 2600);
		const [x, y] = toScreen(camera, place);
		const [movedX, movedY] = toScreen(panBy(camera, 30, -20), place);
		expect(movedX).toBeCloseTo(x + 30);
		expect(movedY).toBeCloseTo(y - 20);
	});

	it('fitting shows all of a rectangle, centred', () => {
		const bounds = { minX: 100, minY: -50, maxX: 400, maxY: 900 };
		const fitted = fit(camera, bounds);
		const view = viewOf(fitted);
		expect(view.minX).toBeLessThan(bounds.minX);
		expect(view.minY).toBeLessThan(bounds.minY);
		expect(view.maxX).toBeGreaterThan(bounds.maxX);
		expect(view.maxY).toBeGreaterThan(bounds.maxY);
		expect([fitted.centreXUm, fitted.centreYUm]).toEqual([250, 425]);
	});

	it.each([
		['room enough: beside what covers it', 900, 300, 324],
		['a narrow one: to its right edge, no further', 620, 300, 96],
		['nothing covered: in the middle', 1280, 0, 390]
	])('%s', (_name, widthPx, coveredPx, leftPx) => {
		const bounds = { minX: 0, minY: 0, maxX: 1000, maxY: 1000 };
		// 548 px high with margins: half a pixel to the micrometre.
		const narrow = fit({ ...camera, widthPx, heightPx: 548 }, bounds);
		const moved = beside(narrow, bounds, coveredPx);
		expect(moved.pxPerUm).toBe(narrow.pxPerUm);
		expect(toScreen(moved, diePoint(0, 0))[0]).toBeCloseTo(leftPx);
	});

	it('fitting a point, or in a canvas without size, gives a finite scale', () => {
		const point = { minX: 5, minY: 5, maxX: 5, maxY: 5 };
		expect(fit(camera, point, 2).pxPerUm).toBe(2);
		expect(fit({ ...camera, widthPx: 0, heightPx: 0 }, point, 2).pxPerUm).toBeGreaterThan(0);
	});
});
