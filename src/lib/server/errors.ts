/** The closed list of what can go wrong on purpose. One map gives the HTTP status. */
export const ERROR_STATUS = {
	'not-signed-in': 401,
	'not-allowed': 403,
	'not-found': 404,
	conflict: 409,
	'version-changed': 409,
	'precondition-failed': 412,
	'too-large': 413,
	'unsupported-file': 415,
	invalid: 422,
	'wrong-state': 422,
	locked: 423,
	'precondition-required': 428,
	'too-many-requests': 429,
	unavailable: 503,
	internal: 500
} as const;
export type ErrorCode = keyof typeof ERROR_STATUS;

export interface FieldProblem {
	/** Dotted path of the field, or a sheet cell. */
	field: string;
	message: string;
}

/**
 * The one error type of the server. `message` is for the person; `detail` is for the log only.
 * `data` may carry what the page needs to help (for example the newer version on a conflict).
 */
export class AppError extends Error {
	readonly status: number;
	constructor(
		readonly code: ErrorCode,
		message: string,
		readonly options: { fields?: FieldProblem[]; detail?: string; data?: Record<string, unknown> } = {}
	) {
		super(message);
		this.name = 'AppError';
		this.status = ERROR_STATUS[code];
	}
}

export const notFound = (what = 'page'): AppError =>
	new AppError('not-found', `There is no such ${what}, or it is not shared with you.`);
export const notAllowed = (message = 'Your role in this group does not include this.'): AppError =>
	new AppError('not-allowed', message);
export const versionChanged = (data: Record<string, unknown>): AppError =>
	new AppError(
		'version-changed',
		'Somebody else saved a newer version meanwhile. Nothing of yours is lost: compare the two and save again.',
		{ data }
	);
