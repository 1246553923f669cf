import { describe, expect, it } from 'vitest';
import { changeField, moveItems, removeItems } from '#lib/floorplan/edits/index.ts';
import { EditorDriver, smallPlan } from '../../../tests/support/editor-driver.ts';

const onR1 = [120, 110] as const;
const onR2 = [220, 110] as const;
const nowhere = [700, 700] as const;

const open = () => new EditorDriver(smallPlan());

describe('selecting', () => {
	it('a click selects what is under it, and only that', () => {
		const driver = open().click(...onR1);
		expect(driver.selection).toEqual(['R1']);
		expect(driver.click(...onR2).selection).toEqual(['R2']);
	});

	it('a click beside everything clears the selection', () => {
		expect(
			open()
				.click(...onR1)
				.click(...nowhere).selection
		).toEqual([]);
	});

	it('Shift adds, and takes away again', () => {
		const driver = open()
			.click(...onR1)
			.click(...onR2, { shift: true });
		expect(driver.selection).toEqual(['R1', 'R2']);
		expect(driver.click(...onR1, { shift: true }).selection).toEqual(['R2']);
		expect(driver.click(...nowhere, { shift: true }).selection).toEqual(['R2']);
	});

	it('a click on one of many leaves that one', () => {
		const driver = open()
			.click(...onR1)
			.click(...onR2, { shift: true })
			.click(...onR1);
		expect(driver.selection).toEqual(['R1']);
	});

	it('a regulator on top of a block is hit before it', () => {
		const plan = smallPlan();
		const driver = new EditorDriver({
			...plan,
			regulators: [{ ...plan.regulators[0], xUm: 200, yUm: 300 }]
		});
		expect(driver.click(210, 310).selection).toEqual(['R1']);
		expect(driver.click(300, 500).selection).toEqual(['cpu']);
	});

	it('what is hidden is neither hit nor selected, and leaves the selection', () => {
		const driver = open().click(...onR1);
		const { visibility } = driver.editor;
		driver.editor.setVisibility({
			...visibility,
			lists: { ...visibility.lists, regulators: false }
		});
		expect(driver.selection).toEqual([]);
		expect(driver.click(...onR1).selection).toEqual([]);
		driver.key('Mod+a');
		expect(driver.selection).not.toContain('R1');
		expect(driver.selection).toContain('cpu');
	});

	it('select all takes every placed thing; Escape clears', () => {
		const driver = open();
		driver.key('Mod+a');
		expect(driver.selection).toHaveLength(9);
		driver.key('Escape');
		expect(driver.selection).toEqual([]);
	});

	it('n and Shift+n walk through the items of a kind, k goes on to the next kind', () => {
		const driver = open();
		driver.key('n');
		expect(driver.selection).toEqual(['R1']);
		driver.key('n');
		expect(driver.selection).toEqual(['R2']);
		driver.key('Shift+n');
		driver.key('Shift+n');
		expect(driver.selection).toEqual(['F']);
		driver.key('k');
		expect(driver.selection).toEqual(['B1']);
	});
});

describe('a marquee', () => {
	it('takes what it encloses wholly', () => {
		const driver = open().drag([90, 90], [250, 130]);
		expect(driver.selection).toEqual(['R1', 'R2']);
		expect(open().drag([90, 90], [239, 130]).selection).toEqual(['R1']);
	});

	it('may be drawn in any direction', () => {
		expect(open().drag([250, 130], [90, 90]).selection).toEqual(['R1', 'R2']);
	});

	it('adds with Shift, and Escape leaves what was selected before', () => {
		const driver = open().click(320, 110);
		driver.drag([90, 90], [150, 130], { shift: true });
		expect(driver.selection).toEqual(['R3', 'R1']);
		driver.press(190, 90).move(250, 130);
		expect(driver.state).toBe('select.marquee');
		driver.key('Escape');
		expect(driver.selection).toEqual(['R3', 'R1']);
		expect(driver.state).toBe('select.idle');
	});

	it('nothing stays marked as under the pointer while a hand draws or drags', () => {
		const driver = open().press(450, 550);
		expect(driver.editor.hovered).toBe('blocks:cpu');
		driver.move(300, 300);
		expect(driver.editor.hovered).toBeNull();
	});

	it('may begin on a block that is not selected', () => {
		const driver = open();
		const { hash } = driver;
		driver.press(450, 550).move(300, 300);
		expect(driver.state).toBe('select.marquee');
		driver.release(300, 300);
		expect(driver.hash).toBe(hash);
	});
});

describe('dragging', () => {
	it('brings a regulator to the nearest site', () => {
		const driver = open().drag(onR1, [132.4, 117.4]);
		expect(driver.placeOf('R1')).toEqual([110, 105]);
		expect(driver.edits).toHaveLength(1);
	});

	it('moves everything selected, rigidly', () => {
		const driver = open()
			.click(...onR1)
			.click(...onR2, { shift: true })
			.drag(onR2, [231, 131]);
		expect(driver.placeOf('R1')).toEqual([110, 120]);
		expect(driver.placeOf('R2')).toEqual([210, 120]);
	});

	it('regulators come to rest on sites also when the hand holds a bump', () => {
		const driver = open()
			.click(...onR1)
			.click(900, 700, { shift: true })
			.drag([900, 700], [903.7, 701.2]);
		expect(driver.placeOf('R1')).toEqual([105, 100]);
	});

	it('Alt suspends snapping', () => {
		const driver = open()
			.press(...onR1)
			.move(130, 110, { alt: true })
			.release(123.25, 110, { alt: true });
		expect(driver.placeOf('R1')).toEqual([103.25, 100]);
	});

	it('does not begin before the hand has moved 3 px', () => {
		const driver = open();
		const umPerPx = 1 / driver.editor.camera.pxPerUm;
		driver.press(...onR1).move(120 + 2 * umPerPx, 110);
		expect(driver.state).toBe('select.pressing');
		driver.move(120 + 4 * umPerPx, 110);
		expect(driver.state).toBe('select.dragging');
	});

	it('is worked out from where it began: there and back is no edit', () => {
		const driver = open();
		const { hash } = driver;
		driver
			.press(...onR1)
			.move(400, 300)
			.move(...onR1)
			.release(...onR1);
		expect(driver.hash).toBe(hash);
		expect(driver.edits).toEqual([]);
	});

	it('says while it goes on what speaks against the place, and does not stop the hand', () => {
		const driver = open()
			.press(...onR1)
			.move(...onR2);
		const reasons = driver.editor.overlay.drag?.reasons.get('R1') ?? [];
		expect(reasons.map(({ code }) => code)).toEqual(['overlap']);
		driver.release(...onR2);
		expect(driver.placeOf('R1')).toEqual([200, 100]);
	});

	it('a block is dragged once it is selected, on whole micrometres', () => {
		const driver = open().click(300, 500).drag([300, 500], [300, 513.3]);
		const [cpu] = driver.editor.floorplan.blocks;
		expect(cpu.outline[0]).toEqual([100, 213]);
	});

	it('fixed regulators stay, whatever moves along', () => {
		const driver = open();
		driver.drag([420, 110], [500, 110]);
		expect(driver.placeOf('F')).toEqual([400, 100]);
		expect(driver.editor.refusal?.message).toContain('F is fixed');
		driver.key('Shift+a');
		driver.drag(onR1, [120, 160]);
		expect(driver.placeOf('F')).toEqual([400, 100]);
		expect(driver.placeOf('R3')).toEqual([300, 150]);
	});

	it.each(['Escape', 'right click'])('given up by %s it leaves no trace, and redo works', (how) => {
		const driver = open();
		driver.drag(onR1, [140, 160]);
		driver.drag(onR2, [240, 200]);
		const after = driver.hash;
		driver.key('Mod+z');
		driver.key('Mod+z');
		const before = driver.hash;
		driver.press(...onR1).move(600, 600);
		if (how === 'Escape') driver.key('Escape');
		else driver.editor.cancel();
		driver.release(600, 600);
		expect(driver.hash).toBe(before);
		driver.key('Mod+y');
		driver.key('Mod+Shift+z');
		expect(driver.hash).toBe(after);
	});

	it('somebody who may not draw moves nothing', () => {
		const driver = new EditorDriver(smallPlan(), { canDraw: false });
		driver.drag(onR1, [300, 300]);
		for (const key of ['Delete', 'Mod+d', 'ArrowLeft', 'r']) driver.key(key);
		driver.pause();
		expect(driver.edits).toEqual([]);
	});

	it('somebody who may only change loads moves blocks, and nothing else', () => {
		const driver = new EditorDriver(smallPlan(), { canDraw: false, canEditLoads: true });
		driver.drag(onR1, [300, 300]);
		expect(driver.edits).toEqual([]);
		driver.click(300, 500).drag([300, 500], [310, 500]);
		expect(driver.edits.map(({ label }) => label)).toEqual(['Move block cpu']);
		driver.key('Mod+a');
		expect(driver.key('Delete')).toBe(false);
	});
});

describe('standing illegally', () => {
	it('is known of every unit after every edit, and over when it has been moved', () => {
		const driver = new EditorDriver(smallPlan());
		expect([...driver.editor.problems.keys()]).toEqual([]);
		driver.drag(onR1, onR2);
		expect([...driver.editor.problems.keys()]).toEqual(['R1', 'R2']);
		driver.key('Mod+z');
		expect([...driver.editor.problems.keys()]).toEqual([]);
	});
});

describe('snapping and guides', () => {
	it.each([0.5, 1, 2])('reaches 6 px at %s px per um', (pxPerUm) => {
		const near = open();
		near.editor.flyTo(700, 350);
		near.editor.setScale(pxPerUm);
		near.click(700, 350);
		// io's left edge is at 600, cpu's right edge at 500: 5 px short of it snaps, 8 px does not.
		near.press(700, 350).move(600 + 5 / pxPerUm, 350);
		expect(near.editor.overlay.drag?.dxUm).toBe(-100);
		near.move(600 + 8 / pxPerUm, 350);
		expect(near.editor.overlay.drag?.dxUm).not.toBe(-100);
	});

	it('tells with a guide what a regulator agrees with', () => {
		const driver = open()
			.press(...onR1)
			.move(120, 260);
		// R1 at x 100 shares its left edge with the block cpu.
		const guides = driver.editor.overlay.drag?.guides ?? [];
		expect(guides).toContainEqual(expect.objectContaining({ axis: 'x', atUm: 100 }));
	});
});

describe('nudging', () => {
	it('moves by a site, and by ten with Shift', () => {
		const driver = open().click(...onR1);
		driver.key('ArrowRight');
		driver.key('Shift+ArrowUp');
		driver.pause();
		expect(driver.placeOf('R1')).toEqual([105, 150]);
	});

	it('a run of nudges is one edit and one step of undo', () => {
		const driver = open().click(...onR1);
		const { hash } = driver;
		for (let i = 0; i < 7; i++) driver.key('ArrowRight');
		expect(driver.edits).toEqual([]);
		driver.pause();
		expect(driver.edits).toHaveLength(1);
		expect(driver.placeOf('R1')).toEqual([135, 100]);
		driver.key('Mod+z');
		expect(driver.hash).toBe(hash);
	});

	it('undo in the middle of a run takes back the whole run', () => {
		const driver = open().click(...onR1);
		const { hash } = driver;
		driver.key('ArrowRight');
		driver.key('ArrowRight');
		driver.key('Mod+z');
		expect(driver.hash).toBe(hash);
		driver.key('Mod+y');
		expect(driver.placeOf('R1')).toEqual([110, 100]);
	});

	it('anything else ends the run: what follows is a step of its own', () => {
		const driver = open().click(...onR1);
		driver.key('ArrowRight');
		driver.click(...onR2);
		driver.key('ArrowRight');
		driver.pause();
		expect(driver.edits.map(({ label }) => label)).toEqual([
			'Move regulator R1',
			'Move regulator R2'
		]);
	});

	it('ten thousand steps out and back end where they began', () => {
		const driver = open().click(900, 700);
		const { hash } = driver;
		for (const key of ['ArrowRight', 'ArrowLeft']) {
			for (let i = 0; i < 10_000; i++) {
				driver.key(key);
				if (i % 1000 === 0) driver.pause();
			}
			driver.pause();
		}
		expect(driver.hash).toBe(hash);
	});

	it('with nothing to move the arrow keys move the view', () => {
		const driver = open();
		const { centreXUm } = driver.editor.camera;
		driver.key('ArrowRight');
		expect(driver.editor.camera.centreXUm).toBeGreaterThan(centreXUm);
	});
});

describe('duplicating and deleting', () => {
	it('three copies of the same thing: no two on top of each other, all legal', () => {
		const driver = open();
		for (let i = 0; i < 3; i++) {
			driver.editor.select([{ list: 'regulators', id: 'R1' }]);
			driver.key('Mod+d');
		}
		const { regulators } = driver.editor.floorplan;
		expect(regulators).toHaveLength(7);
		expect(new Set(regulators.map(({ xUm, yUm }) => `${xUm} ${yUm}`)).size).toBe(7);
		for (const one of regulators) expect(driver.editor.reasonsAgainst(one)).toEqual([]);
	});

	it('the copies are selected, and one undo removes them', () => {
		const driver = open()
			.click(...onR1)
			.click(...onR2, { shift: true });
		const { hash } = driver;
		driver.key('Mod+d');
		expect(driver.selection).toEqual(['R1_2', 'R2_2']);
		driver.key('Mod+z');
		expect(driver.hash).toBe(hash);
	});

	it.each(['Delete', 'Backspace'])('%s deletes the selection; undo brings it back', (key) => {
		const driver = open().click(...onR1);
		const { hash } = driver;
		driver.key(key);
		expect(driver.editor.floorplan.regulators.map(({ id }) => id)).toEqual(['R2', 'R3', 'F']);
		expect(driver.selection).toEqual([]);
		driver.key('Mod+z');
		expect(driver.hash).toBe(hash);
	});

	it('fixed regulators are not deleted, and the person is told', () => {
		const driver = open().click(420, 110);
		driver.key('Delete');
		expect(driver.editor.floorplan.regulators).toHaveLength(4);
		expect(driver.editor.refusal?.message).toContain('fixed');
		driver.key('l');
		driver.key('Delete');
		expect(driver.editor.floorplan.regulators).toHaveLength(3);
	});
});

describe('turning, switching', () => {
	it.each([
		['r', 'R90'],
		['m', 'MY'],
		['Shift+m', 'MX']
	])('%s gives %s', (key, orient) => {
		const driver = open().click(...onR1);
		driver.key(key);
		expect(driver.editor.floorplan.regulators[0].orient).toBe(orient);
	});

	it('four turns are none', () => {
		const driver = open().click(...onR1);
		const { hash } = driver;
		for (let i = 0; i < 4; i++) driver.key('r');
		expect(driver.hash).toBe(hash);
	});

	it('e switches off, and on again', () => {
		const driver = open().click(...onR1);
		driver.key('e');
		expect(driver.editor.floorplan.regulators[0].enabled).toBe(false);
		driver.key('e');
		expect(driver.editor.floorplan.regulators[0].enabled).toBe(true);
	});
});

describe('history beside other people', () => {
	it('undo never takes back what somebody else has changed since', () => {
		const driver = open().drag(onR1, [140, 160]);
		const { floorplan } = driver.editor;
		driver.receive(changeField(floorplan, 'regulators', ['R1'], 'xUm', 700));
		driver.key('Mod+z');
		expect(driver.placeOf('R1')).toEqual([700, 150]);
		expect(driver.editor.refusal?.message).toContain('xUm of R1');
	});

	it('a step that no longer fits is given up, and the one before it can be undone', () => {
		const driver = open();
		driver.drag(onR2, [220, 160]);
		driver.drag(onR1, [140, 160]);
		driver.receive(removeItems(driver.editor.floorplan, [{ list: 'regulators', id: 'R1' }]));
		driver.key('Mod+z');
		expect(driver.editor.refusal?.message).toContain('R1');
		driver.key('Mod+z');
		expect(driver.placeOf('R2')).toEqual([200, 100]);
	});

	it("others' edits of other things stay when ours are undone", () => {
		const driver = open().drag(onR1, [140, 160]);
		const r2 = [{ list: 'regulators', id: 'R2' }] as const;
		driver.receive(moveItems(driver.editor.floorplan, r2, 50, 0));
		driver.key('Mod+z');
		expect(driver.placeOf('R1')).toEqual([100, 100]);
		expect(driver.placeOf('R2')).toEqual([250, 100]);
	});

	it('an edit that arrives in the middle of a drag does not disturb it', () => {
		const driver = open()
			.press(...onR1)
			.move(140, 160);
		const r2 = [{ list: 'regulators', id: 'R2' }] as const;
		driver.receive(moveItems(driver.editor.floorplan, r2, 50, 0));
		driver.move(160, 160).release(160, 160);
		expect(driver.placeOf('R1')).toEqual([140, 150]);
		expect(driver.placeOf('R2')).toEqual([250, 100]);
	});
});
