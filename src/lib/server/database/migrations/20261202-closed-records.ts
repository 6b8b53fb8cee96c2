import { DataTypes, type QueryInterface } from 'sequelize';

/** Said or read under a person's name: never changed, never taken away. */
const APPEND_ONLY = ['review_comments', 'caution_acknowledgements'];
/** Their state moves on; the rows stay. */
const KEPT = ['recipes', 'recipe_versions', 'shares', 'runs', 'studies', 'schemes'];
/** What a signature stands on: closed from the moment that a version leaves its draft. */
const SIGNED = 'recipe_id, number, content, content_hash, fit_id, window_id, author_id, reason';

const refuse = (q: QueryInterface, name: string, when: string, why: string) =>
	q.sequelize.query(`CREATE TRIGGER ${name} BEFORE ${when} BEGIN SELECT RAISE(ABORT, '${why}'); END`);

export async function up(q: QueryInterface): Promise<void> {
	for (const table of APPEND_ONLY)
		await refuse(q, `${table}_refuse_update`, `UPDATE ON ${table}`, `${table} is append-only`);
	for (const table of [...APPEND_ONLY, ...KEPT])
		await refuse(q, `${table}_refuse_delete`, `DELETE ON ${table}`, `${table} are kept`);
	await refuse(
		q,
		'recipe_versions_refuse_change',
		`UPDATE OF ${SIGNED} ON recipe_versions WHEN OLD.state <> 'draft'`,
		'a version is changed as a draft alone'
	);
	await q.createTable('ended_sessions', {
		id: { type: DataTypes.UUID, primaryKey: true, allowNull: false },
		user_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'users', key: 'id' } },
		signed_in_at: { type: DataTypes.DATE, allowNull: false },
		created_at: { type: DataTypes.DATE, allowNull: false }
	});
	await q.addIndex('ended_sessions', ['user_id', 'signed_in_at'], {
		name: 'ended_sessions_user_id_signed_in_at_index'
	});
}
