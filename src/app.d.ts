import type { Actor } from '$lib/server/policy';

declare global {
	namespace App {
		interface Error {
			message: string;
			/** Reference that the site admin can find in the log. */
			id?: string;
			code?: string;
		}
		interface Locals {
			/** The signed-in person, checked against the database at this request; null when signed out. */
			actor: Actor | null;
			/** The group whose work is shown, from the person's memberships. */
			groupId: string | null;
		}
	}
}

export {};
