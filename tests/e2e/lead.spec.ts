import { expect, test } from '@playwright/test';
import { choose, openDemo, openPanel, origin, signIn } from './people.ts';

test('a lead reads findings and proof of every mode, and keeps the project’s members', async ({
	page
}) => {
	await signIn(page, 'lead');
	await page.getByRole('link', { name: 'Osier hub' }).first().click();
	if (!page.url().includes('/projects/')) await page.goto(`${origin()}/projects`);
	await page.goto(`${origin()}/projects`);
	await openDemo(page);
	const reading = page.getByRole('tabpanel', { name: 'Reading' });
	for (const mode of ['Typical use', 'Burst, low battery', 'Memory test', 'Sleep']) {
		await choose(page, 'Mode', mode);
		await expect(reading.getByText(/Every regulator.s state agrees/)).toBeVisible();
	}
	await choose(page, 'Mode', 'Burst, low battery');
	await choose(page, 'Corner', 'Hot, thin metal');
	const finding = reading.getByRole('button', { name: /core_2_4/ }).first();
	await finding.click();
	await openPanel(page, 'Properties');
	await expect(page.getByRole('heading', { name: /core_2_4/ })).toBeVisible();
	await expect(page).toHaveURL(/mode=burst/);

	// Results stay in the address: a reload shows the same mode and corner.
	await page.reload();
	await expect(page.getByRole('combobox', { name: 'Mode', exact: true })).toHaveValue('burst');
});

test('a viewer sees everything and changes nothing', async ({ page }) => {
	await signIn(page, 'viewer');
	await openDemo(page);
	await expect(page.getByRole('button', { name: 'Solve', exact: true })).toBeDisabled();
	await expect(page.getByText(/Place on/)).toBeHidden();
	const id = page.url().split('/floorplans/')[1].split('?')[0];
	const answer = await page.evaluate(async (floorplanId) => {
		const response = await fetch(`/api/v1/floorplans/${floorplanId}/solves`, {
			method: 'POST',
			headers: { 'content-type': 'application/json' },
			body: '{}'
		});
		return response.status;
	}, id);
	expect(answer).toBe(403);
});
