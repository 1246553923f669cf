import { expect, test } from '@playwright/test';
import {
	choose,
	expectSaved,
	ledgerRow,
	openDemo,
	openPanel,
	outOfDate,
	signIn
} from './people.ts';

test('an analyst finds the worst spots, changes a current and solves, but does not draw', async ({
	page
}) => {
	await signIn(page, 'analyst');
	await openDemo(page);
	await choose(page, 'Mode', 'Burst, low battery');
	await choose(page, 'Corner', 'Hot, thin metal');

	const reading = page.getByRole('tabpanel', { name: 'Reading' });
	await expect(reading.getByText(/block core\.alu1 sees a drop of/)).toBeVisible();
	await reading
		.getByRole('button', { name: /core\.alu1/ })
		.first()
		.click();

	// Every state of a regulator is in the ledger.
	for (const state of ['limited', 'idle', 'drop-out', 'off']) {
		await page.getByRole('searchbox', { name: 'Filter Regulators' }).fill(state);
		await expect(
			page
				.getByRole('region', { name: /^Ledger/ })
				.getByText(state, { exact: true })
				.first()
		).toBeVisible();
	}

	// A regulator may be looked at, not moved.
	await page.getByRole('searchbox', { name: 'Filter Regulators' }).fill('');
	await ledgerRow(page, 'core_0_1').click();
	await openPanel(page, 'Properties');
	await expect(page.getByText(/Your role may look/)).toBeVisible();

	// A block's current may be changed, and solved.
	await page.getByRole('tab', { name: 'Blocks' }).click();
	await ledgerRow(page, 'core.alu1').click();
	const amps = page.getByRole('textbox', { name: 'Burst, low battery' });
	const before = await amps.inputValue();
	await amps.fill('120 mA');
	await amps.press('Enter');
	await expectSaved(page);
	await expect(outOfDate(page)).toBeVisible();
	await page.getByRole('button', { name: 'Solve', exact: true }).click();
	await expect(outOfDate(page)).toBeHidden();
	await openPanel(page, 'Reading');
	await expect(reading.getByText(/block core\.alu1 sees a drop of/)).toBeHidden();

	// Back to how it was: the kept result answers without another solve.
	await openPanel(page, 'Properties');
	await amps.fill(before);
	await amps.press('Enter');
	await expectSaved(page);
	await expect(outOfDate(page)).toBeHidden();
});
