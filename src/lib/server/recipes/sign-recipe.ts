import type { Meaning } from '$lib/schemas/recipe';
import { notAllowed } from '../errors';
import type { Actor } from '../policy';
import type { SignInput } from './sign';
import { submitRecipe } from './submit-recipe';
import { validateRecipe } from './validate-recipe';
import { verifyRecipe } from './verify-recipe';

/** One door for the three meanings of a signature; each has its own conditions. */
export function signRecipe(
	actor: Actor,
	input: SignInput & { meaning: Meaning }
): Promise<{ state: string; version?: number }> {
	if (actor.scopes || actor.signedInAt === null)
		return Promise.reject(notAllowed('A token can never sign. Sign in as yourself in the browser.'));
	if (input.meaning === 'Validated') return validateRecipe(actor, input);
	if (input.meaning === 'Verified') return verifyRecipe(actor, input);
	return submitRecipe(actor, input);
}
