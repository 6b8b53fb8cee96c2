import { CredentialsSignin, SvelteKitAuth, type SvelteKitAuthConfig } from '@auth/sveltekit';
import Credentials from '@auth/sveltekit/providers/credentials';
import type { RequestEvent } from '@sveltejs/kit';
import { readActor, type SessionPerson } from '$lib/server/auth/actor';
import { signIn as checkPassword } from '$lib/server/auth/sign-in';
import { AppError } from '$lib/server/errors';
import { log } from '$lib/server/log';
import { settings } from '$lib/server/settings';

declare module '@auth/core/types' {
	interface Session {
		person?: SessionPerson;
	}
	interface User {
		/** Counts how often every session of the person was ended. */
		epoch?: number;
	}
}

/** A session that is not used for so long has ended; each request starts the time anew. */
const IDLE_S = 8 * 3600;
/** However much it is used, the password is asked again after so long. */
const LONGEST_MS = 7 * 24 * 3600 * 1000;

/** Carries our own refusal through the library to the sign-in page. */
class SignInRefused extends CredentialsSignin {
	constructor(readonly refusal: AppError) {
		super(refusal.message);
		this.code = refusal.code;
	}
}

function credentials(event: RequestEvent) {
	return Credentials({
		credentials: { email: {}, password: { type: 'password' } },
		async authorize({ email, password }) {
			try {
				const user = await checkPassword({
					email: typeof email === 'string' ? email : '',
					password: typeof password === 'string' ? password : '',
					address: event.getClientAddress()
				});
				return { id: user.id, epoch: user.sessionEpoch };
			} catch (caught) {
				if (caught instanceof AppError) throw new SignInRefused(caught);
				throw caught;
			}
		}
	});
}

const callbacks: SvelteKitAuthConfig['callbacks'] = {
	/** A session is signed, but whether it still holds is asked of the database at each request. */
	async jwt({ token, user }) {
		if (user) {
			const person: SessionPerson = {
				userId: user.id!,
				epoch: user.epoch!,
				signedInAt: new Date().toISOString()
			};
			return { person };
		}
		const person = token.person as SessionPerson | undefined;
		if (!person || Date.now() - Date.parse(person.signedInAt) > LONGEST_MS) return null;
		return (await readActor(person)) ? { person } : null;
	},
	session({ session, token }) {
		return { expires: session.expires, person: token.person as SessionPerson };
	}
};

function configOf(event: RequestEvent): Promise<SvelteKitAuthConfig> {
	return Promise.resolve({
		providers: [credentials(event)],
		callbacks,
		secret: settings().AUTH_SECRET,
		trustHost: true,
		// By our own address, not by what a request header claims.
		useSecureCookies: settings().ORIGIN.startsWith('https:'),
		session: { strategy: 'jwt' as const, maxAge: IDLE_S },
		pages: { signIn: '/sign-in', error: '/sign-in' },
		logger: {
			error: (error) => {
				if (!(error instanceof CredentialsSignin)) log().warn({ err: error }, 'session not read');
			},
			warn: () => undefined,
			debug: () => undefined
		}
	});
}

const auth = SvelteKitAuth(configOf);
export const handle = auth.handle;

/** The library reads its input from a form post: this is one, made from what the page's own form has checked. */
function asFormPost(event: RequestEvent, fields: Record<string, string>): RequestEvent {
	const headers = new Headers(event.request.headers);
	headers.delete('content-type');
	headers.delete('content-length');
	const body = new URLSearchParams({ ...fields, redirect: '', redirectTo: '/' });
	const request = new Request(event.url, { method: 'POST', headers, body });
	return { ...event, request, url: event.url, cookies: event.cookies };
}

/** Signs in and sets the session's cookie, or throws the refusal as an AppError. */
export async function openSession(
	event: RequestEvent,
	{ email, password }: { email: string; password: string }
): Promise<void> {
	try {
		await auth.signIn(asFormPost(event, { providerId: 'credentials', email, password }));
	} catch (caught) {
		if (caught instanceof SignInRefused) throw caught.refusal;
		const cause = (caught as { cause?: { err?: unknown } }).cause?.err;
		throw cause instanceof SignInRefused ? cause.refusal : caught;
	}
}

/** Takes the session's cookie away from this browser. */
export async function closeSession(event: RequestEvent): Promise<void> {
	await auth.signOut(asFormPost(event, {}));
}
