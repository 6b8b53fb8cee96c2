import pino, { type Logger } from 'pino';
import { settings } from './settings';

let logger: Logger | undefined;

/** The service's log: one JSON line an event, without secrets and without content of records. */
export function log(): Logger {
	return (logger ??= pino({
		level: settings().LOG_LEVEL,
		base: undefined,
		timestamp: pino.stdTimeFunctions.isoTime,
		redact: ['password', '*.password', 'authorization', 'headers.authorization', 'headers.cookie', 'token']
	}));
}
