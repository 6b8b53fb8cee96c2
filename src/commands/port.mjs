import { createServer } from 'node:net';

/**
 * Whether a port can be listened on.
 * @param {number} port
 * @param {string} host
 * @returns {Promise<boolean>}
 */
export function portIsFree(port, host) {
	return new Promise((resolve) => {
		const probe = createServer();
		probe.once('error', () => resolve(false));
		probe.listen(port, host, () => probe.close(() => resolve(true)));
	});
}
