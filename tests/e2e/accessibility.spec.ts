import AxeBuilder from '@axe-core/playwright';
import { expect, test, type Page } from '@playwright/test';
import { drawing, openDemo, origin, signIn } from './people.ts';

async function violations(page: Page): Promise<string[]> {
	const { violations: found } = await new AxeBuilder({ page }).analyze();
	return found.flatMap(({ id, nodes }) => nodes.map(({ html }) => `${id}: ${html.slice(0, 160)}`));
}

for (const theme of ['light', 'dark'] as const) {
	test(`no page breaks a rule of axe in the ${theme} theme`, async ({ page }) => {
		await page.addInitScript((value) => localStorage.setItem('manyweir-theme', value), theme);
		for (const path of ['/sign-in', '/sign-up']) {
			await page.goto(origin() + path);
			expect(await violations(page), path).toEqual([]);
		}
		await signIn(page, 'lead');
		expect(await violations(page), '/projects').toEqual([]);
		for (const path of ['/team', '/account']) {
			await page.goto(origin() + path);
			expect(await violations(page), path).toEqual([]);
		}
		await page.goto(`${origin()}/projects`);
		await page.locator('a[href^="/projects/"]').last().click();
		await expect(page.getByRole('heading', { name: 'Members' })).toBeVisible();
		expect(await violations(page), 'project').toEqual([]);
		await page.goto(`${origin()}/projects`);
		await openDemo(page);
		for (const tab of ['Reading', 'Properties', 'Layers']) {
			await page.getByRole('tab', { name: new RegExp(`^${tab}`) }).click();
			expect(await violations(page), tab).toEqual([]);
		}
	});

	test(`no part of a review breaks a rule of axe in the ${theme} theme`, async ({ page }) => {
		await page.addInitScript((value) => localStorage.setItem('manyweir-theme', value), theme);
		await signIn(page, 'placer');
		await openDemo(page);
		await page.getByRole('button', { name: 'Freeze …' }).click();
		await expect(page.getByRole('dialog')).toBeVisible();
		expect(await violations(page), 'freeze').toEqual([]);
		await page.goto(`${origin()}/projects`);
		await page.locator('a[href^="/projects/"]').last().click();
		await page.getByRole('link', { name: 'Revision 2' }).click();
		await expect(drawing(page)).toBeVisible();
		for (const tab of ['Review', 'Findings', 'Threads', 'Reading']) {
			await page.getByRole('tab', { name: new RegExp(`^${tab}`) }).click();
			expect(await violations(page), tab).toEqual([]);
		}
	});
}

test('no script or style is refused by the content security policy', async ({ page }) => {
	const refused: string[] = [];
	page.on('console', (message) => {
		if (message.text().includes('Content Security Policy')) refused.push(message.text());
	});
	await signIn(page, 'lead');
	await openDemo(page);
	await page.getByRole('button', { name: 'Keys and gestures' }).click();
	await expect(page.getByRole('dialog')).toBeVisible();
	await page.keyboard.press('Escape');
	await expect(page.getByRole('dialog')).toBeHidden();
	expect(refused).toEqual([]);
});
