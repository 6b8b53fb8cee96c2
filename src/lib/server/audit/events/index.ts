import { z } from 'zod';
import { fitEvents } from './fits';
import { peopleEvents } from './people';
import { recipeEvents } from './recipes';
import { studyEvents } from './studies';

/** Every kind of entry and the payload that it must carry; parsed when written and again when read. */
export const AUDIT_EVENTS = { ...peopleEvents, ...studyEvents, ...fitEvents, ...recipeEvents };

export type AuditType = keyof typeof AUDIT_EVENTS;
export type AuditPayload<T extends AuditType> = z.infer<(typeof AUDIT_EVENTS)[T]>;

/** An entry to be written: one type with its own payload. */
export type AuditEntry = {
	[T in AuditType]: {
		type: T;
		payload: AuditPayload<T>;
		groupId?: string | null;
		studyId?: string | null;
		objectType: string;
		objectId?: string | null;
		objectVersion?: number | null;
		reason?: string | null;
	};
}[AuditType];
