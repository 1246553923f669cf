import { expect, test } from '@playwright/test';
import { drawing, expectSaved, ledgerRow, openDemo, openPanel, signIn } from './people.ts';

test('two people edit at once: different things merge, the same thing asks', async ({
	browser
}) => {
	const placerPage = await (await browser.newContext()).newPage();
	const leadContext = await browser.newContext();
	const leadPage = await leadContext.newPage();
	await signIn(placerPage, 'placer');
	await signIn(leadPage, 'lead');
	await openDemo(placerPage);
	await openDemo(leadPage);
	const offset = (page: typeof leadPage) => page.getByRole('textbox', { name: 'Offset' });

	// Different regulators: both edits stand on both sides.
	await ledgerRow(placerPage, 'mem_0_0').click();
	await openPanel(placerPage, 'Properties');
	const first = await offset(placerPage).inputValue();
	await offset(placerPage).fill('1.25 mV');
	await offset(placerPage).press('Enter');
	await expectSaved(placerPage);
	await ledgerRow(leadPage, 'mem_0_0').click();
	await openPanel(leadPage, 'Properties');
	await expect(offset(leadPage)).toHaveValue('1.25 mV');

	// The same field, the lead being away: the second to arrive is asked, with both values.
	await leadContext.setOffline(true);
	await offset(leadPage).fill('3 mV');
	await offset(leadPage).press('Enter');
	await expect(leadPage.getByText(/Offline, 1 change waits/)).toBeVisible();
	await offset(placerPage).fill('2 mV');
	await offset(placerPage).press('Enter');
	await expectSaved(placerPage);
	await leadContext.setOffline(false);
	const dialog = leadPage.getByRole('dialog');
	await expect(dialog).toContainText('3 mV');
	await expect(dialog).toContainText('2 mV');
	await expect(dialog).toContainText('Mira Okonjo');
	await dialog.getByRole('button', { name: 'Keep theirs' }).click();
	await expect(dialog).toBeHidden();
	await expect(offset(leadPage)).toHaveValue('2 mV');

	await offset(placerPage).fill(first);
	await offset(placerPage).press('Enter');
	await expectSaved(placerPage);
	await expect(offset(leadPage)).toHaveValue(first);
	await drawing(leadPage).focus();
});
