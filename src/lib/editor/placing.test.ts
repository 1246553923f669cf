import { describe, expect, it } from 'vitest';
import { EditorDriver, smallPlan } from '../../../tests/support/editor-driver.ts';
import { placing } from './tools/place/placing.ts';
import { probing } from './tools/probe/probing.ts';

const template = { cell: 'weir', input: 'vin', output: 'vdd', orient: 'R0' } as const;

function startPlacing(): EditorDriver {
	const driver = new EditorDriver(smallPlan());
	driver.editor.startTool((host) => placing(host, template));
	return driver;
}

describe('placing', () => {
	it('a ghost follows the pointer on sites, held by its middle', () => {
		const driver = startPlacing().move(551.8, 701);
		const ghost = driver.editor.overlay.ghost?.regulator;
		expect([ghost?.xUm, ghost?.yUm]).toEqual([530, 690]);
		expect(driver.editor.overlay.ghost?.reasons).toEqual([]);
	});

	it('a click places one, selects it, and the tool stays', () => {
		const driver = startPlacing().click(550, 700);
		expect(driver.selection).toEqual(['vdd_1']);
		expect(driver.placeOf('vdd_1')).toEqual([530, 690]);
		expect(driver.state).toBe('place.placing');
		driver.click(650, 700);
		expect(driver.selection).toEqual(['vdd_2']);
		expect(driver.edits).toHaveLength(2);
	});

	it.each([
		['on another regulator', 120, 110, 'overlap'],
		['in a keep-out', 900, 100, 'keep-out'],
		['over the edge', 995, 400, 'outside-die']
	])('%s nothing is placed, and the ghost says why', (_name, xUm, yUm, code) => {
		const driver = startPlacing().move(xUm, yUm);
		expect(driver.editor.overlay.ghost?.reasons.map((reason) => reason.code)).toContain(code);
		driver.click(xUm, yUm);
		expect(driver.edits).toEqual([]);
		expect(driver.editor.refusal?.message).toContain('Not placed');
	});

	it('Alt places anywhere, off the sites too', () => {
		const driver = startPlacing().click(900.123, 100, { alt: true });
		expect(driver.placeOf('vdd_1')).toEqual([880.123, 90]);
	});

	it('keys alone: the ghost begins in the middle of the view, arrows move it, Enter places', () => {
		const driver = startPlacing();
		const ghost = driver.editor.overlay.ghost?.regulator;
		for (const key of ['ArrowRight', 'Shift+ArrowUp', 'Enter']) driver.key(key);
		expect(driver.placeOf('vdd_1')).toEqual([(ghost?.xUm ?? 0) + 5, (ghost?.yUm ?? 0) + 50]);
		// A second one on the same place is refused.
		driver.key('Enter');
		expect(driver.edits).toHaveLength(1);
	});

	it('a press can be given up before it is let go; Escape then ends the tool', () => {
		const driver = startPlacing().press(550, 700);
		driver.key('Escape');
		driver.release(550, 700);
		expect(driver.edits).toEqual([]);
		expect(driver.state).toBe('place.placing');
		driver.key('Escape');
		expect(driver.state).toBe('select.idle');
		expect(driver.editor.overlay).toEqual({});
	});

	it('undo takes back the last one and the tool stays in the hand', () => {
		const driver = startPlacing().click(550, 700);
		driver.key('Mod+z');
		expect(driver.editor.floorplan.regulators).toHaveLength(4);
		expect(driver.state).toBe('place.placing');
	});
});

describe('probing', () => {
	it('arrow keys move the place that is read by steps on the screen', () => {
		const driver = new EditorDriver(smallPlan());
		driver.editor.startTool(probing);
		const { pxPerUm, centreXUm, centreYUm } = driver.editor.camera;
		driver.key('ArrowRight');
		driver.key('Shift+ArrowUp');
		const [xUm, yUm] = driver.editor.overlay.probe ?? [0, 0];
		expect((xUm - centreXUm) * pxPerUm).toBeCloseTo(8);
		expect((yUm - centreYUm) * pxPerUm).toBeCloseTo(64);
	});

	it('p begins and ends it', () => {
		const driver = new EditorDriver(smallPlan());
		driver.key('p');
		expect(driver.state).toBe('probe.reading');
		driver.key('p');
		expect(driver.state).toBe('select.idle');
	});
});
