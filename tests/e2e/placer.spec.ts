import { expect, test } from '@playwright/test';
import {
	drawing,
	expectSaved,
	ledgerRow,
	openDemo,
	openPanel,
	outOfDate,
	signIn
} from './people.ts';

test('a placer moves a regulator, solves, and reads the answer', async ({ page }) => {
	await signIn(page, 'placer');
	await openDemo(page);

	// The answer of the demo is there already: worst drop, spots, proof.
	const reading = page.getByRole('tabpanel', { name: 'Reading' });
	await expect(reading.getByRole('heading', { name: 'Worst spots' })).toBeVisible();
	await expect(reading.getByText(/Currents add up at every node/)).toBeVisible();

	// Select in the ledger, move by keys in the drawing.
	await ledgerRow(page, 'core_0_3').click();
	await openPanel(page, 'Properties');
	const x = page.getByRole('textbox', { name: 'x', exact: true });
	const before = await x.inputValue();
	await drawing(page).focus();
	await expect(page.locator('#die-canvas-state')).toHaveText(/core_0_3/);
	await page.keyboard.press('ArrowRight');
	await page.keyboard.press('ArrowRight');
	await expect(x).not.toHaveValue(before);
	await expectSaved(page);

	// The map is of the plan as it was, until it is solved again.
	await expect(outOfDate(page)).toBeVisible();
	await page.getByRole('button', { name: 'Solve', exact: true }).click();
	await expect(outOfDate(page)).toBeHidden();
	await openPanel(page, 'Reading');
	await expect(reading.getByText(/Power in equals power out/)).toBeVisible();

	// One burst of nudges is one step of undo; the kept result of the old plan answers at once.
	await drawing(page).focus();
	await page.keyboard.press('Control+z');
	await openPanel(page, 'Properties');
	await expect(x).toHaveValue(before);
	await expectSaved(page);
	await expect(outOfDate(page)).toBeHidden();
});

test('a placer drags a regulator with the pointer and takes it back', async ({ page }) => {
	await signIn(page, 'placer');
	await openDemo(page);
	await ledgerRow(page, 'core_0_3').dblclick();
	await openPanel(page, 'Properties');
	const x = page.getByRole('textbox', { name: 'x', exact: true });
	const before = await x.inputValue();
	const box = await drawing(page).boundingBox();
	if (!box) throw new Error('the drawing has no place');
	// A double click in the ledger brings the regulator to the middle of the drawing.
	const [middleX, middleY] = [box.x + box.width / 2, box.y + box.height / 2];
	await page.mouse.move(middleX, middleY);
	await page.mouse.down();
	await page.mouse.move(middleX + 30, middleY, { steps: 5 });
	await page.mouse.up();
	await expect(x).not.toHaveValue(before);
	await page.keyboard.press('Control+z');
	await expect(x).toHaveValue(before);
});

test('edits made offline are kept and sent on return', async ({ page, context }) => {
	await signIn(page, 'placer');
	await openDemo(page);
	await ledgerRow(page, 'core_0_5').click();
	await openPanel(page, 'Properties');
	const offset = page.getByRole('textbox', { name: 'Offset' });
	const before = await offset.inputValue();
	await context.setOffline(true);
	await offset.fill('2.5 mV');
	await offset.press('Enter');
	await expect(page.getByText(/Offline, 1 change waits/)).toBeVisible();
	await context.setOffline(false);
	await expectSaved(page);
	await page.reload();
	await ledgerRow(page, 'core_0_5').click();
	await openPanel(page, 'Properties');
	await expect(offset).toHaveValue('2.5 mV');
	await offset.fill(before);
	await offset.press('Enter');
	await expectSaved(page);
});
