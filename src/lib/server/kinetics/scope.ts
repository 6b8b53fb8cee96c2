import { notAllowed } from '../errors';
import type { Actor, Scope } from '../policy';

/** The engine's direct calls touch no record; a token still has to be meant for them. */
export function requireEngineScope(actor: Actor, scopes: Scope[]): void {
	if (actor.scopes && !scopes.some((scope) => actor.scopes?.includes(scope)))
		throw notAllowed(`This token needs one of these scopes: ${scopes.join(', ')}.`);
}
