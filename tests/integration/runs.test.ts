import { beforeAll, describe, expect, it } from 'vitest';
import { RUN_50C, makeWork } from './support/work';
import { AuditEvent, RunRevision, type Group } from '../../src/lib/server/database/models';
import type { Actor } from '../../src/lib/server/policy';
import { excludePoint } from '../../src/lib/server/runs/exclude-point';
import { listRuns } from '../../src/lib/server/runs/list-runs';
import { readRun } from '../../src/lib/server/runs/read-run';
import { restorePoint } from '../../src/lib/server/runs/restore-point';
import { reviseRun } from '../../src/lib/server/runs/revise-run';
import { makeActor, makeGroup, openTestDatabase } from './support';

const test = openTestDatabase();

let group: Group;
let chemist: Actor;
beforeAll(async () => {
	group = await makeGroup();
	chemist = await makeActor(group);
});

const exclude = (runId: string, version: number, over: Record<string, unknown> = {}) =>
	excludePoint(chemist, {
		runId,
		version,
		index: 3,
		channel: 'B',
		reasonCode: 'assay error',
		reason: 'integration of the peak was changed',
		...over
	});

describe('runs', () => {
	it('are listed with what they hold', async () => {
		const { studyId } = await makeWork(chemist, group.id);
		const [run] = await listRuns(chemist, studyId);
		expect(run).toMatchObject({ number: 1, name: 'Run 1', times: 12, values: 36, limits: 0, excluded: 0 });
	});

	it('an excluded point is a new revision with a reason; the one before stays as it was', async () => {
		const { runIds } = await makeWork(chemist, group.id);
		const saved = await exclude(runIds[0], 1);
		expect(saved).toMatchObject({ version: 2, revision: 2 });
		const view = await readRun(chemist, runIds[0]);
		expect(view.content.exclusions).toMatchObject([
			{ index: 3, channel: 'B', reasonCode: 'assay error', by: chemist.name }
		]);
		expect(view.revisions[0].differences).toMatchObject([{ field: 'B at 1 h', from: 'used' }]);
		const first = await RunRevision.findOne({ where: { runId: runIds[0], number: 1 } });
		expect(first!.content.exclusions).toBeUndefined();
		const entry = await AuditEvent.findOne({ where: { objectId: runIds[0], type: 'run.point-excluded' } });
		expect(entry!.reason).toBe('integration of the peak was changed');
	});

	it('the database refuses to change a revision', async () => {
		const { runIds } = await makeWork(chemist, group.id);
		const { sequelize } = test.database();
		await expect(
			sequelize.query('UPDATE run_revisions SET content = ? WHERE run_id = ?', {
				replacements: ['{}', runIds[0]]
			})
		).rejects.toMatchObject({ original: { message: expect.stringContaining('append-only') as string } });
	});

	it('a point is used again by a further revision, and only if it was excluded', async () => {
		const { runIds } = await makeWork(chemist, group.id);
		await exclude(runIds[0], 1);
		const input = {
			runId: runIds[0],
			version: 2,
			index: 3,
			channel: 'B',
			reason: 'the old integration was right'
		};
		expect(await restorePoint(chemist, input)).toMatchObject({ revision: 3 });
		await expect(restorePoint(chemist, { ...input, version: 3 })).rejects.toMatchObject({
			code: 'wrong-state'
		});
		expect((await readRun(chemist, runIds[0])).content.exclusions).toEqual([]);
	});

	it.each(['.', 'ok', '12345', '   - - -   '])('the reason %j is refused', async (reason) => {
		const { runIds } = await makeWork(chemist, group.id);
		await expect(exclude(runIds[0], 1, { reason })).rejects.toMatchObject({
			code: 'invalid',
			options: { fields: [{ field: 'reason' }] }
		});
	});

	it('a row or a column that is not there cannot be excluded', async () => {
		const { runIds } = await makeWork(chemist, group.id);
		await expect(exclude(runIds[0], 1, { index: 12 })).rejects.toMatchObject({ code: 'invalid' });
		await expect(exclude(runIds[0], 1, { channel: 'D' })).rejects.toMatchObject({ code: 'invalid' });
	});

	it('of two changes on the same revision the second is refused with the newer content', async () => {
		const { runIds } = await makeWork(chemist, group.id);
		await exclude(runIds[0], 1);
		await expect(exclude(runIds[0], 1, { index: 4 })).rejects.toMatchObject({
			code: 'version-changed',
			options: { data: { version: 2, revision: 2 } }
		});
	});

	it('a changed temperature is a revision that names both', async () => {
		const { runIds } = await makeWork(chemist, group.id);
		await reviseRun(chemist, {
			runId: runIds[0],
			version: 1,
			content: { ...RUN_50C, temperature: { value: 51.5, unit: 'degC' } },
			reason: 'log of the internal temperature was read'
		});
		const view = await readRun(chemist, runIds[0]);
		expect(view.revisions[0].differences).toEqual([
			{ field: 'temperature', from: { value: 50, unit: 'degC' }, to: { value: 51.5, unit: 'degC' } }
		]);
	});
});
