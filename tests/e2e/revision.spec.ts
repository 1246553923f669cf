import { expect, test } from '@playwright/test';
import { drawing, expectSaved, ledgerRow, openDemo, openPanel, signIn } from './people.ts';

test('a placer freezes and asks, others talk, the lead returns with what is asked for', async ({
	browser
}) => {
	const [placer, viewer, lead] = await Promise.all(
		[1, 2, 3].map(async () => (await browser.newContext()).newPage())
	);

	await signIn(placer, 'placer');
	await openDemo(placer);
	// A version of its own: what was frozen before is that revision and no new one.
	await ledgerRow(placer, 'core_0_5').click();
	await drawing(placer).focus();
	await placer.keyboard.press('ArrowRight');
	await placer.keyboard.press('ArrowLeft');
	await expectSaved(placer);
	await placer.getByRole('button', { name: 'Freeze …' }).click();
	await placer.getByLabel('Title').fill('For the browser test');
	await placer.getByRole('button', { name: /^Freeze version/ }).click();
	await expect(
		placer.getByRole('heading', { name: /revision \d+ For the browser test/ })
	).toBeVisible();
	await expect(drawing(placer)).toBeVisible();
	const address = placer.url();
	await placer.getByLabel('What to look at').fill('The rail of the core in burst.');
	await placer.getByRole('button', { name: 'Ask for review' }).click();
	await expect(placer.getByRole('button', { name: 'Ask for review' })).toBeHidden();
	// Their own work is not theirs to decide on.
	await expect(placer.getByRole('button', { name: 'Approve' })).toBeHidden();

	await signIn(viewer, 'viewer');
	await viewer.goto(address);
	await openPanel(viewer, 'Threads');
	await viewer.getByLabel('What is to be said').fill('Why so near the sensor window?');
	await viewer.getByRole('button', { name: 'Begin thread' }).click();
	await expect(viewer.getByText('Why so near the sensor window?')).toBeVisible();

	await signIn(lead, 'lead');
	await lead.goto(address);
	await expect(lead.getByText('The rail of the core in burst.')).toBeVisible();
	await openPanel(lead, 'Threads');
	await lead.getByLabel('Answer', { exact: true }).first().fill('It keeps its distance.');
	await lead.getByRole('button', { name: 'Answer', exact: true }).first().click();
	// The event stream brings it to whoever looks on.
	await expect(viewer.getByText('It keeps its distance.')).toBeVisible();

	await openPanel(lead, 'Review');
	const returning = lead.getByRole('button', { name: 'Return', exact: true });
	await expect(returning).toBeDisabled();
	await lead.getByLabel('Why, or what is asked for').fill('Two spots are over their limit.');
	await returning.click();
	await expect(lead.getByRole('region', { name: 'Decision' })).toContainText('Returned');
	await expect(placer.getByRole('region', { name: 'History' })).toContainText(
		'Two spots are over their limit.'
	);
	await expect(placer.getByRole('button', { name: 'Ask for review' })).toBeVisible();

	// A finding leads to its place, in the mode and corner in which it breaks its limit.
	await openPanel(lead, 'Findings');
	await lead
		.getByRole('button', { name: /core_2_4 .*Burst, low battery, Hot, thin metal/ })
		.first()
		.click();
	await expect(lead.getByRole('combobox', { name: 'Mode', exact: true })).toHaveValue('burst');
});
