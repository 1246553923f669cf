import { z } from 'zod';

export const emailSchema = z.email('Enter a mail address such as name@example.com').max(254);

/** Length only here; the server also refuses common and telling passwords. */
export const newPasswordSchema = z
	.string()
	.min(10, 'At least 10 characters')
	.max(256, 'At most 256 characters');

export const signInSchema = z.object({
	email: emailSchema,
	password: z.string().min(1, 'Enter your password').max(256),
	/** Where to go afterwards; only paths of this product are followed. */
	next: z.string().max(500).default('')
});

export const signUpSchema = z.object({
	team: z.string().trim().min(1, 'Name your team').max(120),
	name: z.string().trim().min(1, 'Enter your name').max(120),
	email: emailSchema,
	password: newPasswordSchema
});

export const changePasswordSchema = z.object({
	current: z.string().min(1, 'Enter your present password').max(256),
	password: newPasswordSchema
});

export const sessionSchema = z.object({
	user: z.object({
		id: z.uuid(),
		name: z.string(),
		email: z.string(),
		teamId: z.uuid(),
		teamName: z.string(),
		isTeamAdmin: z.boolean()
	})
});
export type SessionAnswer = z.infer<typeof sessionSchema>;
export type SignedInUser = SessionAnswer['user'];
