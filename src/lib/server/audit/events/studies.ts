import { z } from 'zod';

const change = z.object({ field: z.string(), from: z.unknown(), to: z.unknown() });

export const studyEvents = {
	'study.created': z.object({ name: z.string(), decision: z.string() }),
	'study.changed': z.object({ changes: z.array(change) }),
	'study.archived': z.object({}),
	'scheme.created': z.object({ name: z.string() }),
	'scheme.version-saved': z.object({ number: z.number(), contentHash: z.string(), summary: z.string() }),
	'scheme.renamed': z.object({ from: z.string(), to: z.string() }),
	'sheet.received': z.object({ fileName: z.string(), size: z.number(), sha256: z.string() }),
	'sheet.refused': z.object({ fileName: z.string(), size: z.number(), code: z.string() }),
	'sheet.downloaded': z.object({ fileName: z.string(), sha256: z.string() }),
	'run.created': z.object({
		number: z.number(),
		name: z.string(),
		sheetId: z.string().nullable(),
		contentHash: z.string(),
		answers: z.unknown()
	}),
	'run.revised': z.object({
		number: z.number(),
		revision: z.number(),
		contentHash: z.string(),
		changes: z.array(change)
	}),
	'run.point-excluded': z.object({
		number: z.number(),
		revision: z.number(),
		index: z.number(),
		channel: z.string().nullable(),
		reasonCode: z.string()
	}),
	'run.point-restored': z.object({
		number: z.number(),
		revision: z.number(),
		index: z.number(),
		channel: z.string().nullable()
	})
};
