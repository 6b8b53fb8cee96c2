import { createServer } from 'node:net';

/**
 * Whether a port is free; rejects where it is something else that stands in the way (no such address, no right).
 * @param {number} port
 * @param {string} host
 * @returns {Promise<boolean>}
 */
export function portIsFree(port, host) {
	return new Promise((resolve, reject) => {
		const probe = createServer();
		probe.once('error', (error) => (error.code === 'EADDRINUSE' ? resolve(false) : reject(error)));
		probe.listen(port, host, () => probe.close(() => resolve(true)));
	});
}
