import { RateLimiterMemory, RateLimiterRes } from 'rate-limiter-flexible';
import { AppError } from '../errors';
import type { Actor } from '../policy';
import { settings } from '../settings';

let limiter: { perMinute: number; memory: RateLimiterMemory } | undefined;

function memory(): RateLimiterMemory {
	const perMinute = settings().API_LIMIT_PER_MINUTE;
	if (limiter?.perMinute !== perMinute)
		limiter = { perMinute, memory: new RateLimiterMemory({ points: perMinute, duration: 60 }) };
	return limiter.memory;
}

/** Counts a person's direct calls to the engine; the computer is everybody's. */
export async function limitEngineCalls(actor: Actor): Promise<void> {
	try {
		await memory().consume(actor.userId);
	} catch (caught) {
		if (!(caught instanceof RateLimiterRes)) throw caught;
		const retryAfterS = Math.max(1, Math.ceil(caught.msBeforeNext / 1000));
		throw new AppError(
			'too-many-requests',
			`At most ${settings().API_LIMIT_PER_MINUTE} direct calls to the engine a minute and person. Try again in ${retryAfterS} s.`,
			{ data: { retryAfterS } }
		);
	}
}
