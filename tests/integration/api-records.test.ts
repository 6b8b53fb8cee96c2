import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { call } from './support/call';
import { CHAIN, makeWork, registerQuickFits } from './support/work';
import { openApi } from '../../src/lib/server/api/openapi';
import { OPERATIONS } from '../../src/lib/server/api/operations';
import { Scheme, SchemeVersion, Study, type Group } from '../../src/lib/server/database/models';
import type { Problem } from '../../src/lib/server/http';
import { startQueue, stopQueue } from '../../src/lib/server/jobs/queue';
import { jobEnd } from '../../src/lib/server/jobs/wait';
import type { Actor } from '../../src/lib/server/policy';
import { GET as getEvents } from '../../src/routes/api/v1/fits/[fit]/events/+server';
import { GET as getFit } from '../../src/routes/api/v1/fits/[fit]/+server';
import { GET as getStudies, POST as postStudy } from '../../src/routes/api/v1/groups/[group]/studies/+server';
import { GET as getScheme, PATCH as patchScheme } from '../../src/routes/api/v1/schemes/[scheme]/+server';
import { POST as postRun } from '../../src/routes/api/v1/sheets/[sheet]/runs/+server';
import { GET as getFile } from '../../src/routes/api/v1/sheets/[sheet]/file/+server';
import { POST as postFit } from '../../src/routes/api/v1/studies/[study]/fits/+server';
import { POST as postScheme } from '../../src/routes/api/v1/studies/[study]/schemes/+server';
import { POST as postSheet } from '../../src/routes/api/v1/studies/[study]/sheets/+server';
import { makeActor, makeGroup, openTestDatabase } from './support';

openTestDatabase();

let group: Group;
let actor: Actor;
beforeAll(async () => {
	group = await makeGroup();
	actor = await makeActor(group);
	registerQuickFits();
	await startQueue();
});
afterAll(stopQueue);

const form = { name: 'Quench of QN-7', decision: 'when to quench', criteria: [] };

describe('the description of the API', () => {
	it('lists every call that is there, and none that is not', () => {
		const files = Object.entries(
			import.meta.glob<Record<string, unknown>>('../../src/routes/api/v1/**/+server.ts', { eager: true })
		);
		const there = files
			.flatMap(([file, module]) =>
				Object.keys(module)
					.filter((name) => /^(GET|POST|PUT|PATCH|DELETE)$/.test(name))
					.map((method) => {
						const path = file.replace(/^.*\/api\/v1/, '').replace(/\/\+server\.ts$/, '');
						return `${method.toLowerCase()} ${path.replace(/\[(\w+)\]/g, '{$1}')}`;
					})
			)
			.filter((name) => name !== 'get /openapi.json');
		expect(OPERATIONS.map((o) => `${o.method} ${o.path}`).sort()).toEqual(there.sort());
	});

	it('carries the schemas of the bodies, made from those that read them', () => {
		const described = openApi('https://ratewright.example') as {
			openapi: string;
			paths: Record<
				string,
				Record<string, { requestBody: { content: Record<string, { schema: { required: string[] } }> } }>
			>;
		};
		expect(described.openapi).toBe('3.1.0');
		const fit = described.paths['/kinetics/fit'].post.requestBody.content['application/json'].schema;
		expect(fit.required).toEqual(['species', 'steps', 'referenceTemperature', 'runs']);
		expect(JSON.stringify(described)).not.toContain('undefined');
	});
});

describe('writes', () => {
	it('with an Idempotency-Key run once, also when they come at the same moment', async () => {
		const options = {
			actor,
			body: form,
			params: { group: group.id },
			headers: { 'idempotency-key': 'study-of-monday' }
		};
		const [first, second] = await Promise.all([call(postStudy, options), call(postStudy, options)]);
		const third = await call(postStudy, options);
		expect(first.status).toBe(201);
		expect(second.body).toEqual(first.body);
		expect(third.body).toEqual(first.body);
		expect(third.headers.get('idempotent-replay')).toBe('true');
		expect(third.headers.get('location')).toBe(first.headers.get('location'));
		expect(await Study.count({ where: { groupId: group.id, name: form.name } })).toBe(1);
		const other = await call(postStudy, { ...options, body: { ...form, name: 'Something else' } });
		expect(other.status).toBe(409);
		const colleague = await makeActor(group);
		const theirs = await call(postStudy, { ...options, actor: colleague });
		expect(theirs.body).not.toEqual(first.body);
	});

	it('name the version that they were made on; a stale one gets 409 with the newer state', async () => {
		const { studyId } = await makeWork(actor, group.id, { runs: [] });
		const made = await call(postScheme, {
			actor,
			params: { study: studyId },
			body: { name: 'Candidate', ...CHAIN }
		});
		expect(made.status).toBe(201);
		expect(made.headers.get('etag')).toBe('"1"');
		const { id } = made.body as { id: string };
		const patch = (headers: Record<string, string>, body: unknown) =>
			call(patchScheme, { actor, method: 'PATCH', params: { scheme: id }, headers, body });
		expect((await patch({}, { name: 'No version' })).status).toBe(428);
		expect((await patch({ 'if-match': 'latest' }, { name: 'Odd version' })).status).toBe(412);
		const warmer = { ...CHAIN, referenceTemperature: { value: 60, unit: 'degC' } };
		const saved = await patch({ 'if-match': '"1"' }, warmer);
		expect(saved.status).toBe(200);
		expect(saved.body).toMatchObject({ version: 2, number: 2 });
		const stale = await patch({ 'if-match': '"1"' }, CHAIN);
		expect(stale.status).toBe(409);
		expect(stale.body as Problem).toMatchObject({ code: 'version-changed', data: { version: 2 } });
		const read = await call(getScheme, { actor, params: { scheme: id } });
		expect(read.headers.get('etag')).toBe('"2"');
		expect(await SchemeVersion.count({ where: { schemeId: id } })).toBe(2);
		expect((await Scheme.findByPk(id))?.version).toBe(2);
	});

	it('with a body that is no JSON, or has a field too many, say so', async () => {
		const params = { group: group.id };
		const strange = await call(postScheme, { actor, params, body: { name: 'x', colour: 'red' } });
		expect(strange.status).toBe(422);
		expect((strange.body as Problem).detail).toContain('colour');
	});
});

describe('lists', () => {
	it('are paged by after and limit, and say when a limit makes no sense', async () => {
		const own = await makeGroup();
		const lead = await makeActor(own, 'group_lead');
		for (const name of ['First study', 'Second study', 'Third study'])
			await call(postStudy, { actor: lead, params: { group: own.id }, body: { ...form, name } });
		const get = (query: string) =>
			call(getStudies, { actor: lead, params: { group: own.id }, path: `/api/v1/groups/x/studies${query}` });
		const page = (await get('?limit=2')).body as { items: { name: string }[]; next: string; total: number };
		expect(page.items.map((s) => s.name)).toEqual(['Third study', 'Second study']);
		expect(page.total).toBe(3);
		const rest = (await get(`?limit=2&after=${page.next}`)).body as typeof page;
		expect(rest.items.map((s) => s.name)).toEqual(['First study']);
		expect((await get('?limit=many')).status).toBe(422);
	});
});

describe('from a sheet to a fit by calls alone', () => {
	it('uploads, confirms, fits, follows the events and reads the report', async () => {
		const { studyId, schemeId } = await makeWork(actor, group.id, { runs: [] });
		const sheet = new FormData();
		const text = 'Time (h),A (mol/L)\n0,0.5\n1,0.25\n2,0.125\n3,0.0625\n4,0.031\n5,0.016\n';
		sheet.set('file', new File([text], 'decay.csv'));
		const received = await call(postSheet, { actor, params: { study: studyId }, form: sheet });
		expect(received.status).toBe(201);
		const { id, tables, sha256 } = received.body as {
			id: string;
			sha256: string;
			tables: { id: string; range: string; findings: unknown[] }[];
		};
		expect(tables).toMatchObject([{ id: 't1', range: 'A2:B7' }]);
		const file = await call(getFile, { actor, params: { sheet: id } });
		expect(file.body).toBe(text);
		expect(file.headers.get('content-disposition')).toContain('attachment; filename="decay.csv"');
		expect(file.headers.get('repr-digest')).toBe(
			`sha-256=:${Buffer.from(sha256, 'hex').toString('base64')}:`
		);
		const run = await call(postRun, {
			actor,
			params: { sheet: id },
			body: {
				tableKey: 't1',
				conditions: {
					temperature: { value: 50, unit: 'degC' },
					initial: { A: { value: 0.5, unit: 'mol/L' } }
				}
			}
		});
		expect(run.status).toBe(201);
		const runId = (run.body as { id: string }).id;
		const started = await call(postFit, {
			actor,
			params: { study: studyId },
			body: { schemeId, runIds: [runId] }
		});
		expect(started.status).toBe(202);
		const fitId = (started.body as { id: string }).id;
		expect(started.headers.get('location')).toBe(`/api/v1/fits/${fitId}`);
		await jobEnd(fitId);
		const events = await call(getEvents, { actor, params: { fit: fitId } });
		expect(events.headers.get('content-type')).toContain('text/event-stream');
		expect(events.body).toMatch(/^retry: 2000\n\nid: 1\nevent: queued\n/);
		expect(events.body).toMatch(/event: done\ndata: .*"number":1/);
		const after = { actor, params: { fit: fitId }, headers: { 'last-event-id': '99' } };
		expect((await call(getEvents, after)).status).toBe(204);
		const fit = await call(getFit, { actor, params: { fit: fitId } });
		expect(fit.body).toMatchObject({ status: 'done', number: 1, report: { status: 'converged' } });
	});

	it('a refused confirmation names the conditions and cells that are open', async () => {
		const { studyId } = await makeWork(actor, group.id, { runs: [] });
		const sheet = new FormData();
		sheet.set('file', new File(['Time (h),A\n0,0.5\n1,0.25\n2,0.1\n3,0.05\n4,0.02\n'], 'no-unit.csv'));
		const received = await call(postSheet, { actor, params: { study: studyId }, form: sheet });
		const { id } = received.body as { id: string };
		const refused = await call(postRun, { actor, params: { sheet: id }, body: { tableKey: 't1' } });
		expect(refused.status).toBe(422);
		const fields = (refused.body as Problem).fields!.map((f) => f.field);
		expect(fields).toContain('conditions.temperature');
		expect(fields.some((f) => f.endsWith('!B1'))).toBe(true);
	});

	it('an upload without a file, and one that is no sheet, are refused in words', async () => {
		const { studyId } = await makeWork(actor, group.id, { runs: [] });
		const empty = await call(postSheet, { actor, params: { study: studyId }, form: new FormData() });
		expect(empty.status).toBe(422);
		expect((empty.body as Problem).fields).toMatchObject([{ field: 'file' }]);
		const picture = new FormData();
		picture.set('file', new File([Buffer.from('89504e470d0a1a0a', 'hex')], 'assay.xlsx'));
		const refused = await call(postSheet, { actor, params: { study: studyId }, form: picture });
		expect(refused.status).toBe(415);
		expect((refused.body as Problem).detail).toContain('PNG');
	});
});
