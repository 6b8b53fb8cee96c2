import type { HandleServerError } from '@sveltejs/kit';
import { newErrorId } from '../http';
import { log } from '../log';

/** What nobody foresaw: the log gets all of it, the person a reference to it. */
export const reportError: HandleServerError = ({ error, event, status, message }) => {
	if (status === 404) return { message: 'There is no such page.', code: 'not-found' };
	if (status < 500) return { message };
	const id = newErrorId();
	log().error({ err: error, errorId: id, method: event.request.method, path: event.url.pathname, status });
	return {
		message: `The service met a fault that nobody foresaw. Reference for your admin: ${id}`,
		id,
		code: 'internal'
	};
};
