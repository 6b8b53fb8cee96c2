import { appendAudit } from '../audit/append';
import { verifyPasswordAgain } from '../auth/verify-again';
import { write } from '../database';
import type { Recipe } from '../database/models';
import { AppError } from '../errors';
import type { Actor } from '../policy';
import { about } from './audit';

/**
 * Asks for the password again before a signature. A refusal is an entry on the record's own trail too: misuse has to
 * be found where the signature would stand (21 CFR 11.300). Opens its own transactions.
 */
export async function askPassword(
	actor: Actor,
	recipe: Recipe,
	number: number,
	password: string
): Promise<void> {
	try {
		await verifyPasswordAgain(actor, password, { groupId: recipe.groupId, studyId: recipe.studyId });
	} catch (refused) {
		const why = refused instanceof AppError ? refused.code : 'internal';
		await write((tx) =>
			appendAudit(tx, actor, {
				type: 'recipe.signing-failed',
				payload: { number, why },
				...about(recipe, number)
			})
		);
		throw refused;
	}
}
