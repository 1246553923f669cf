import { z } from 'zod';
import { PROJECT_ROLES } from './roles.ts';

const titleSchema = z.string().trim().min(1, 'Enter a name').max(120, 'At most 120 characters');

export const createProjectSchema = z.strictObject({ name: titleSchema });

/** A floorplan at a glance. */
export const floorplanSummarySchema = z.object({
	id: z.uuid(),
	name: z.string(),
	version: z.int(),
	regulators: z.int(),
	blocks: z.int(),
	updatedAt: z.iso.datetime({ offset: true }),
	updatedBy: z.string(),
	/** The worst over the kept results of the present document, or null where there is none. */
	reading: z
		.object({
			/** Modes and corners solved, of how many. */
			solved: z.int(),
			combinations: z.int(),
			worstDropV: z.number(),
			/** What the worst block or spot has left of its limit; null without a limit. */
			worstMarginV: z.number().nullable(),
			findings: z.int()
		})
		.nullable()
});
export type FloorplanSummary = z.infer<typeof floorplanSummarySchema>;

export const floorplanListSchema = z.object({ floorplans: z.array(floorplanSummarySchema) });

export const memberSchema = z.object({
	userId: z.uuid(),
	name: z.string(),
	email: z.string(),
	role: z.enum(PROJECT_ROLES)
});
export type Member = z.infer<typeof memberSchema>;

export const projectSummarySchema = z.object({
	id: z.uuid(),
	name: z.string(),
	role: z.enum(PROJECT_ROLES).nullable(),
	createdAt: z.iso.datetime({ offset: true }),
	floorplans: z.array(floorplanSummarySchema)
});
export type ProjectSummary = z.infer<typeof projectSummarySchema>;

export const projectListSchema = z.object({ projects: z.array(projectSummarySchema) });

export const projectSchema = projectSummarySchema.extend({ members: z.array(memberSchema) });
export type Project = z.infer<typeof projectSchema>;

export const setMemberSchema = z.strictObject({ role: z.enum(PROJECT_ROLES) });

/** Asks for a copy of the demo, under its own name where none is given. */
export const addDemoSchema = z.object({
	name: z.string().trim().max(120, 'At most 120 characters').default('')
});

export const createFloorplanSchema = z.strictObject({
	name: titleSchema,
	/** A Manyweir file; without one the floorplan starts empty. */
	document: z.unknown().optional()
});
