import { z } from 'zod';
import { ERROR_STATUS } from '../errors';
import { OPERATIONS, type Operation } from './operations';

type Json = Record<string, unknown>;

/** JSON Schema of what a caller sends; what JSON cannot say (a refinement) is left to the error message. */
const schemaOf = (schema: z.ZodType): Json =>
	z.toJSONSchema(schema, { io: 'input', unrepresentable: 'any', reused: 'inline' });

const parameters = (operation: Operation): Json[] => {
	const inPath = [...operation.path.matchAll(/\{(\w+)\}/g)].map(([, name]) => ({
		name,
		in: 'path',
		required: true,
		schema: { type: 'string', format: 'uuid' }
	}));
	const inQuery = (operation.query ?? []).map(({ name, what, type }) => ({
		name,
		in: 'query',
		description: what,
		schema: { type }
	}));
	const header = (name: string, description: string): Json => ({
		name,
		in: 'header',
		description,
		schema: { type: 'string' }
	});
	return [
		...inPath,
		...inQuery,
		...(operation.versioned ? [header('If-Match', 'version of the record that was read: "3"')] : []),
		...(operation.once ? [header('Idempotency-Key', 'the same key with the same request runs once')] : [])
	];
};

function requestBody(operation: Operation): Json | undefined {
	if (operation.upload) {
		const schema = {
			type: 'object',
			required: ['file'],
			properties: { file: { type: 'string', contentMediaType: 'application/octet-stream' } }
		};
		return { required: true, content: { 'multipart/form-data': { schema } } };
	}
	if (!operation.body) return undefined;
	const schema =
		operation.path === '/sheets/{sheet}'
			? { type: 'object', required: ['work'], properties: { work: schemaOf(operation.body) } }
			: schemaOf(operation.body);
	return { required: true, content: { 'application/json': { schema } } };
}

const ANY_JSON = { type: 'object', additionalProperties: true };

function answersOf(operation: Operation): Json {
	const type = operation.type ?? 'application/json';
	const content = { [type]: { schema: type === 'application/json' ? ANY_JSON : { type: 'string' } } };
	return {
		[String(operation.status ?? 200)]: { description: operation.gives, content },
		default: { $ref: '#/components/responses/Problem' }
	};
}

const idOf = ({ method, path }: Operation): string =>
	method + path.replace(/[{}]/g, '').replace(/\/(\w)/g, (_, letter: string) => letter.toUpperCase());

function operationOf(operation: Operation): Json {
	const body = requestBody(operation);
	const scope = operation.scope === null ? 'No token may.' : `Scope of a token: ${operation.scope}.`;
	return {
		operationId: idOf(operation),
		summary: operation.summary,
		description: `Gives ${operation.gives}. ${scope}`,
		tags: [operation.area],
		parameters: parameters(operation),
		...(body ? { requestBody: body } : {}),
		responses: answersOf(operation),
		security: operation.scope === null ? [{ session: [] }] : [{ session: [] }, { token: [] }]
	};
}

const PROBLEM = {
	type: 'object',
	required: ['type', 'title', 'status', 'code', 'detail'],
	properties: {
		type: { type: 'string' },
		title: { type: 'string' },
		status: { type: 'integer' },
		code: { enum: Object.keys(ERROR_STATUS) },
		detail: { type: 'string' },
		fields: {
			type: 'array',
			items: {
				type: 'object',
				required: ['field', 'message'],
				properties: { field: { type: 'string' }, message: { type: 'string' } }
			}
		},
		data: ANY_JSON,
		errorId: { type: 'string' }
	}
};

/** The description of the whole API, made from the schemas that the calls themselves use. */
export function openApi(origin: string): Json {
	const paths: Record<string, Json> = {};
	for (const operation of OPERATIONS)
		paths[operation.path] = { ...paths[operation.path], [operation.method]: operationOf(operation) };
	return {
		openapi: '3.1.0',
		info: {
			title: 'Ratewright',
			version: '1',
			description:
				'From a reaction scheme and assay timepoints to rate constants, windows and a signed batch recipe. Errors are problem details (RFC 9457).'
		},
		servers: [{ url: `${origin}/api/v1` }],
		paths,
		components: {
			securitySchemes: {
				session: { type: 'apiKey', in: 'cookie', name: 'authjs.session-token' },
				token: { type: 'http', scheme: 'bearer' }
			},
			schemas: { Problem: PROBLEM },
			responses: {
				Problem: {
					description: 'What was found, where, and what is expected.',
					content: { 'application/problem+json': { schema: { $ref: '#/components/schemas/Problem' } } }
				}
			}
		}
	};
}

export interface DocumentedCall {
	method: string;
	path: string;
	summary: string;
	gives: string;
	scope: string | null;
	notes: string[];
	/** Names of the body's fields, with an asterisk where one must be there. */
	fields: string[];
}

function fieldsOf(operation: Operation): string[] {
	if (operation.upload) return ['file*'];
	if (!operation.body) return [];
	const schema = schemaOf(operation.body) as { properties?: Json; required?: string[] };
	return Object.keys(schema.properties ?? {}).map((name) =>
		schema.required?.includes(name) ? `${name}*` : name
	);
}

/** The same list for people, by area. */
export function documentation(): { area: string; calls: DocumentedCall[] }[] {
	const areas = [...new Set(OPERATIONS.map((o) => o.area))];
	return areas.map((area) => ({
		area,
		calls: OPERATIONS.filter((o) => o.area === area).map((o) => ({
			method: o.method.toUpperCase(),
			path: `/api/v1${o.path}`,
			summary: o.summary,
			gives: o.gives,
			scope: o.scope,
			notes: [
				...(o.versioned ? ['If-Match with the version that was read'] : []),
				...(o.once ? ['Idempotency-Key'] : []),
				...(o.query ?? []).map((q) => `?${q.name}= ${q.what}`)
			],
			fields: fieldsOf(o)
		}))
	}));
}
