/**
 * One table over every call and page: who gets what. Routes are found by themselves, so that a new one without an entry
 * here fails. What belongs to another group is answered as what does not exist.
 */
import { isHttpError, isRedirect } from '@sveltejs/kit';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { call, eventOf, type CallOptions } from './support/call';
import { makeWork } from './support/work';
import { registerFits } from '../../src/lib/server/fits/fit-job';
import { startFit } from '../../src/lib/server/fits/start-fit';
import { fitWorker } from '../../src/lib/server/fits/worker-source';
import { guard, isPublic } from '../../src/lib/server/hooks/guard';
import { startQueue, stopQueue } from '../../src/lib/server/jobs/queue';
import { jobEnd } from '../../src/lib/server/jobs/wait';
import type { Actor } from '../../src/lib/server/policy';
import { createRecipe } from '../../src/lib/server/recipes/create-recipe';
import { readRun } from '../../src/lib/server/runs/read-run';
import { receiveSheet } from '../../src/lib/server/sheets/receive-sheet';
import { computeWindow } from '../../src/lib/server/windows/compute-window';
import { actorOf, makeActor, makeGroup, makePerson, openTestDatabase } from './support';

openTestDatabase();

type Module = Record<string, unknown>;
const METHODS = ['GET', 'POST', 'PUT', 'PATCH', 'DELETE'] as const;
const SERVERS = import.meta.glob<Module>('../../src/routes/**/+server.ts', { eager: true });
const PAGES = import.meta.glob<Module>('../../src/routes/**/+page.server.ts', { eager: true });
const ALL_PAGES = Object.keys(import.meta.glob('../../src/routes/**/+page.svelte'));

/** "/api/v1/fits/[fit]" from the path of the file; groups in parentheses are no part of an address. */
const routeOf = (file: string): string =>
	file
		.replace('../../src/routes', '')
		.replace(/\/\+(server|page(\.server)?)\.(ts|svelte)$/, '')
		.replace(/\/\([^)]+\)/g, '') || '/';

type Who = 'other' | 'reader' | 'chemist' | 'lead' | 'qa' | 'admin';
const WHO: Who[] = ['other', 'reader', 'chemist', 'lead', 'qa', 'admin'];
/** 'in': got past the question of who may; what became of the request is another matter. */
type Expected = Record<Who, 'in' | 403 | 404>;

const none = { other: 404, reader: 404, admin: 404 } as const;
const READ: Expected = { ...none, chemist: 'in', lead: 'in', qa: 'in' };
const WRITE: Expected = { ...none, chemist: 'in', lead: 'in', qa: 403 };
const LEAD: Expected = { ...none, chemist: 403, lead: 'in', qa: 403 };
const EXPORT: Expected = { ...none, chemist: 403, lead: 'in', qa: 'in' };
/** The trail of the groups that somebody leads or reviews; a site admin sees the site's own entries. */
const TRAIL: Expected = { other: 'in', reader: 403, chemist: 403, lead: 'in', qa: 'in', admin: 'in' };
/** No record of a group is touched, or only the person's own. */
const ANYBODY: Expected = { other: 'in', reader: 'in', chemist: 'in', lead: 'in', qa: 'in', admin: 'in' };

let people: Record<Who, Actor>;
let ids: Record<string, string>;
const scheme = () => ({
	species: [{ id: 'A' }],
	steps: [],
	referenceTemperature: { value: 25, unit: 'degC' }
});
const batch = () => ({ ...scheme(), initial: {}, times: [], timeUnit: 'h' });
const comment = 'please say what the limit rests on';
const hash = 'a'.repeat(64);
const upload = (): FormData => {
	const form = new FormData();
	form.set('file', new File(['Time (h),A (mol/L)\n0,1\n1,0.5\n2,0.25\n'], 'new.csv'));
	return form;
};
const windowInput = () => ({
	temperature: { value: 50, unit: 'degC' },
	charge: { A: { value: 0.5, unit: 'mol/L' } }
});

interface Entry {
	expected: Expected;
	options?: () => CallOptions;
	/** Where the call needs more than its address. */
	query?: () => string;
}
const entry = (expected: Expected, body?: () => unknown): Entry => ({
	expected,
	...(body ? { options: () => ({ body: body() }) } : {})
});

const CALLS: Record<string, Entry> = {
	'POST /api/v1/kinetics/solve': entry(ANYBODY, batch),
	'POST /api/v1/kinetics/fit': entry(ANYBODY, () => ({ ...scheme(), runs: [] })),
	'POST /api/v1/kinetics/sampling-plan': entry(ANYBODY, () => ({
		...scheme(),
		run: {
			temperature: { value: 25, unit: 'degC' },
			initial: {},
			timeUnit: 'h',
			channels: [{ id: 'A', weights: { A: 1 }, unit: 'mol/L' }]
		},
		error: { a: 0.01 },
		samples: 2,
		earliest: 0,
		latest: 8
	})),
	'GET /api/v1/groups/[group]/studies': entry(READ),
	'POST /api/v1/groups/[group]/studies': entry(WRITE, () => ({
		name: 'Another study',
		decision: 'when to quench',
		criteria: []
	})),
	'GET /api/v1/studies/[study]': entry(READ),
	'PATCH /api/v1/studies/[study]': entry(WRITE, () => ({ version: 1, name: 'Another name' })),
	'POST /api/v1/studies/[study]/schemes': entry(WRITE, () => ({ name: 'Rival', ...scheme() })),
	'GET /api/v1/schemes/[scheme]': entry(READ),
	'PATCH /api/v1/schemes/[scheme]': entry(WRITE, () => ({ version: 1, name: 'Renamed' })),
	'GET /api/v1/studies/[study]/sheets': entry(READ),
	'POST /api/v1/studies/[study]/sheets': { expected: WRITE, options: () => ({ form: upload() }) },
	'GET /api/v1/sheets/[sheet]': entry(READ),
	'PATCH /api/v1/sheets/[sheet]': entry(WRITE, () => ({ version: 1, work: { tables: {} } })),
	'GET /api/v1/sheets/[sheet]/file': entry(READ),
	'POST /api/v1/sheets/[sheet]/runs': entry(WRITE, () => ({ tableKey: 't1' })),
	'GET /api/v1/studies/[study]/runs': entry(READ),
	'GET /api/v1/runs/[run]': entry(READ),
	'GET /api/v1/studies/[study]/fits': entry(READ),
	'POST /api/v1/studies/[study]/fits': entry(WRITE, () => ({ schemeId: ids.scheme, runIds: [ids.run] })),
	'GET /api/v1/fits/[fit]': entry(READ),
	'DELETE /api/v1/fits/[fit]': { expected: WRITE, options: () => ({ method: 'DELETE' }) },
	'GET /api/v1/fits/[fit]/events': entry(READ),
	'POST /api/v1/fits/[fit]/questions': entry(READ, () => ({ kind: 'curves', run: 'r1', points: 2 })),
	'GET /api/v1/fits/[fit]/windows': entry(READ),
	'POST /api/v1/fits/[fit]/windows': entry(WRITE, windowInput),
	'GET /api/v1/windows/[window]': entry(READ),
	'GET /api/v1/studies/[study]/recipes': entry(READ),
	'POST /api/v1/studies/[study]/recipes': entry(WRITE, () => ({ fitId: ids.fit, title: 'Another recipe' })),
	'GET /api/v1/recipes/[recipe]': entry(READ),
	'PATCH /api/v1/recipes/[recipe]': entry(WRITE, () => ({ version: 1, content: recipeContent })),
	'POST /api/v1/recipes/[recipe]/versions': entry(WRITE, () => ({ reason: comment })),
	'POST /api/v1/recipes/[recipe]/submit': entry(WRITE, () => ({ version: 1 })),
	'POST /api/v1/recipes/[recipe]/comments': entry(READ, () => ({ text: comment })),
	'POST /api/v1/recipes/[recipe]/return': entry(LEAD, () => ({ version: 1, comment })),
	'POST /api/v1/recipes/[recipe]/sign': entry(LEAD, () => ({
		version: 1,
		meaning: 'Validated',
		contentHash: hash,
		password: 'not the password'
	})),
	'POST /api/v1/recipes/[recipe]/share': entry(LEAD, () => ({ groupId: ids.otherGroup })),
	'POST /api/v1/recipes/[recipe]/withdraw': entry(LEAD, () => ({ version: 1, reason: comment })),
	'GET /api/v1/recipes/[recipe]/workbook': entry(EXPORT),
	'GET /api/v1/audit': entry(TRAIL),
	'GET /api/v1/audit/verify': entry(TRAIL),
	'GET /api/v1/openapi.json': entry(ANYBODY),
	'GET /studies/[study]/data/template': entry(READ),
	'POST /studies/[study]/fit/plan': entry(READ),
	'POST /studies/[study]/fit/[fit]/analysis': entry(READ, () => ({ kind: 'influence' })),
	'GET /studies/[study]/fit/[fit]/confirmation/[revision]': entry(READ),
	'GET /studies/[study]/fit/compare/separate': entry(READ),
	'GET /studies/[study]/fit/[fit]/place': entry(READ),
	'GET /studies/[study]/data/sheets/[sheet]/reading': entry(READ),
	'GET /studies/[study]/data/sheets/[sheet]/difference': {
		expected: READ,
		query: () => `?from=${ids.sheet}`
	},
	'GET /open': entry(ANYBODY),
	'POST /choose-group': entry(ANYBODY),
	'GET /records/export': entry(TRAIL),
	'GET /healthz': entry(ANYBODY)
};

let recipeContent: unknown = {};

/** Pages with a record in their address. Every other page shows the person's own things, or nothing. */
const PAGE_EXPECTED: Record<string, Expected> = {
	'/studies/[study]': ANYBODY, // leads on to the scheme page, which asks
	'/studies/[study]/about': READ,
	'/studies/[study]/scheme': READ,
	'/studies/[study]/data': READ,
	'/studies/[study]/data/sheets/[sheet]': READ,
	'/studies/[study]/data/runs/[run]': READ,
	'/studies/[study]/fit': READ,
	'/studies/[study]/fit/[fit]': READ,
	'/studies/[study]/fit/[fit]/plan': READ,
	'/studies/[study]/fit/by-hand': READ,
	'/studies/[study]/fit/compare': READ,
	'/studies/[study]/fit/samples': READ,
	'/studies/[study]/window': READ,
	'/studies/[study]/window/[window]': READ,
	'/studies/[study]/recipe': READ,
	'/recipes/[recipe]': READ,
	'/recipes/[recipe]/v/[number]': READ
};

/** Reached by a secret of their own, or by a share that only its group has (tested with the recipes). */
const BY_SECRET = ['/invitation/[token]', '/reset/[token]', '/shared/[share]'];

const paramsOf = (route: string, values: Record<string, string>): Record<string, string> =>
	Object.fromEntries([...route.matchAll(/\[(\w+)\]/g)].map(([, name]) => [name, values[name] ?? 'missing']));
const pathOf = (route: string): string =>
	route.replace(/\[(\w+)\]/g, (_, name: string) => ids?.[name] ?? 'x');

beforeAll(async () => {
	const group = await makeGroup();
	const otherGroup = await makeGroup();
	people = {
		other: await makeActor(otherGroup, 'group_lead'),
		reader: await makeActor(group, 'reader'),
		chemist: await makeActor(group, 'chemist'),
		lead: await makeActor(group, 'group_lead'),
		qa: await makeActor(group, 'qa_reviewer'),
		admin: await actorOf(await makePerson({ siteAdmin: true }))
	};
	registerFits(fitWorker);
	await startQueue();
	const work = await makeWork(people.chemist, group.id);
	const fit = await startFit(people.chemist, { ...work, options: { starts: 2, profiles: false } });
	await jobEnd(fit.id);
	const sheet = await receiveSheet(people.chemist, {
		studyId: work.studyId,
		fileName: 'sheet.csv',
		bytes: new TextEncoder().encode('Time (h),A (mol/L)\n0,1\n1,0.5\n2,0.25\n3,0.12\n4,0.06\n')
	});
	const window = await computeWindow(people.chemist, { fitId: fit.id, input: windowInput() });
	const recipe = await createRecipe(people.chemist, {
		studyId: work.studyId,
		fitId: fit.id,
		title: 'HX-14 ring closure'
	});
	ids = {
		group: group.id,
		otherGroup: otherGroup.id,
		study: work.studyId,
		scheme: work.schemeId,
		run: work.runIds[0],
		revision: (await readRun(people.chemist, work.runIds[0])).revisionId,
		fit: fit.id,
		sheet: sheet.id,
		window: window.id,
		recipe: recipe.id,
		number: '1'
	};
	const read = SERVERS['../../src/routes/api/v1/recipes/[recipe]/+server.ts'].GET as never;
	const shown = await call(read, { actor: people.chemist, params: { recipe: recipe.id } });
	recipeContent = (shown.body as { shown: { content: unknown } }).shown.content;
}, 60_000);
afterAll(stopQueue);

const found = Object.entries(SERVERS).flatMap(([file, module]) =>
	METHODS.filter((method) => module[method]).map((method) => ({
		key: `${method} ${routeOf(file)}`,
		route: routeOf(file),
		method,
		handler: module[method] as never
	}))
);

const planForm = (): FormData => {
	const form = new FormData();
	form.set('schemeId', ids.scheme);
	form.append('runIds', ids.run);
	return form;
};

function optionsOf(key: string, method: string): CallOptions {
	const own = CALLS[key].options?.() ?? {};
	if (key === 'POST /studies/[study]/fit/plan') return { method, form: planForm() };
	if (key === 'POST /choose-group') return { method, form: new FormData() };
	return { method, ...own };
}

/** Status of what a handler gave or threw; a redirect counts as 303. */
async function statusOf(work: () => Promise<{ status: number } | undefined>): Promise<number> {
	try {
		return (await work())?.status ?? 200;
	} catch (caught) {
		if (isHttpError(caught) || isRedirect(caught)) return caught.status;
		throw caught;
	}
}

const fits = (status: number, expected: 'in' | 403 | 404): boolean =>
	expected === 'in' ? ![401, 403, 404, 500].includes(status) : status === expected;

describe('every call', () => {
	it('has an entry in the table, and the table names no call that is not there', () => {
		expect(found.map((f) => f.key).sort()).toEqual(Object.keys(CALLS).sort());
	});

	it.each(found)('$key: each role gets what the table says', async ({ key, route, method, handler }) => {
		const wrong: string[] = [];
		for (const who of WHO) {
			const options = { ...optionsOf(key, method), params: paramsOf(route, ids), actor: people[who] };
			const status = await statusOf(() =>
				call(handler, { ...options, path: pathOf(route) + (CALLS[key].query?.() ?? '') })
			);
			const expected = CALLS[key].expected[who];
			if (!fits(status, expected)) wrong.push(`${who}: ${status} instead of ${expected}`);
		}
		expect(wrong).toEqual([]);
	});

	it.each(found.filter((f) => f.route.includes('[')))(
		'$key: what is not there and what can be no id are both 404',
		async ({ key, route, method, handler }) => {
			for (const id of ['01890000-0000-7000-8000-000000000000', 'no-id', '%00', '__proto__']) {
				const values = Object.fromEntries(Object.keys(ids).map((name) => [name, id]));
				const options = { ...optionsOf(key, method), params: paramsOf(route, values), actor: people.lead };
				expect(await statusOf(() => call(handler, options)), `${key} with ${id}`).toBe(404);
			}
		}
	);
});

const pages = Object.entries(PAGES).map(([file, module]) => ({ route: routeOf(file), module }));
const withRecord = pages.filter((p) => p.route.includes('[') && !BY_SECRET.includes(p.route));
type Load = (event: never) => Promise<unknown>;

const load = (module: Module, route: string, actor: Actor, values: Record<string, string>) => {
	if (typeof module.load !== 'function') return Promise.resolve(undefined);
	const event = eventOf({ actor, params: paramsOf(route, values), path: pathOf(route) });
	return (module.load as Load)(event as never) as Promise<undefined>;
};

describe('every page', () => {
	it('with a record in its address has an entry in the table', () => {
		expect(withRecord.map((p) => p.route).sort()).toEqual(Object.keys(PAGE_EXPECTED).sort());
	});

	it.each(withRecord)('$route: each role sees what the table says', async ({ route, module }) => {
		const wrong: string[] = [];
		for (const who of WHO) {
			const expected = PAGE_EXPECTED[route][who];
			const status = await statusOf(() => load(module, route, people[who], ids));
			if (!fits(status, expected)) wrong.push(`${who}: ${status} instead of ${expected}`);
		}
		expect(wrong).toEqual([]);
	});

	it.each(withRecord.filter((p) => PAGE_EXPECTED[p.route] !== ANYBODY))(
		'$route: what is not there and what can be no id are both 404',
		async ({ route, module }) => {
			for (const id of ['01890000-0000-7000-8000-000000000000', 'no-id']) {
				const values = Object.fromEntries(Object.keys(ids).map((name) => [name, id]));
				expect(await statusOf(() => load(module, route, people.lead, values))).toBe(404);
			}
		}
	);

	it('of a study does not show a record of another study under its address', async () => {
		const elsewhere = await makeWork(people.chemist, ids.group);
		const mixed = { ...ids, study: elsewhere.studyId };
		for (const { route, module } of withRecord) {
			if (!/\[study\].*\[(sheet|run|fit|window)\]/.test(route)) continue;
			expect(await statusOf(() => load(module, route, people.chemist, mixed)), route).toBe(404);
		}
	});

	it.each(withRecord.filter((p) => p.module.actions))(
		'$route: no form of it can be sent by another group, a reader or a site admin',
		async ({ route, module }) => {
			for (const [name, action] of Object.entries(module.actions as Record<string, Load>))
				for (const who of ['other', 'reader', 'admin'] as const) {
					const form = new FormData();
					for (const [field, value] of [
						['version', '1'],
						['index', '0'],
						['channel', 'A'],
						['reason', comment],
						['reasonCode', 'other'],
						['number', '1'],
						['comment', comment],
						['text', comment],
						['fitId', ids.fit],
						['title', 'Taken over']
					])
						form.set(field, value);
					const event = eventOf({ actor: people[who], params: paramsOf(route, ids), form });
					const status = await statusOf(() => action(event as never) as Promise<{ status: number }>);
					expect(status, `${name} by ${who}`).toBeGreaterThanOrEqual(400);
					expect(status, `${name} by ${who}`).toBeLessThan(500);
				}
		}
	);
});

describe('somebody who is signed out', () => {
	const routes = [...new Set([...found.map((f) => f.route), ...ALL_PAGES.map(routeOf)])];
	const PUBLIC = [
		'/',
		'/healthz',
		'/sign-in',
		'/sign-out',
		'/invitation/[token]',
		'/reset',
		'/reset/[token]',
		'/api/v1/openapi.json',
		'/api/v1/docs'
	];

	it('may open these pages and calls and no others', () => {
		const open = routes.filter((route) => isPublic(pathOf(route)));
		expect(open.sort()).toEqual(PUBLIC.filter((route) => routes.includes(route)).sort());
	});

	it.each(routes.filter((route) => !PUBLIC.includes(route)))('is turned away from %s', async (route) => {
		const event = eventOf({ path: pathOf(route), actor: null });
		const reached = () => Promise.resolve(new Response('reached'));
		const outcome = await statusOf(() =>
			Promise.resolve(guard({ event: event as never, resolve: reached })).then((r) => ({ status: r.status }))
		);
		expect(outcome).toBe(route.startsWith('/api/') ? 401 : 303);
	});
});
