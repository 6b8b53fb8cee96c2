import { DataTypes, type QueryInterface } from 'sequelize';

const id = { type: DataTypes.UUID, primaryKey: true, allowNull: false };
const created_at = { type: DataTypes.DATE, allowNull: false };

/* A migration is frozen once released: it names its columns itself and imports no model. */
const TABLES: Record<string, Parameters<QueryInterface['createTable']>[1]> = {
	users: {
		id,
		email: { type: DataTypes.STRING, allowNull: false, unique: true },
		name: { type: DataTypes.STRING, allowNull: false },
		password_hash: { type: DataTypes.STRING, allowNull: true },
		site_admin: { type: DataTypes.BOOLEAN, allowNull: false, defaultValue: false },
		disabled_at: { type: DataTypes.DATE, allowNull: true },
		session_epoch: { type: DataTypes.INTEGER, allowNull: false, defaultValue: 0 },
		time_zone: { type: DataTypes.STRING, allowNull: true },
		created_at
	},
	groups: {
		id,
		name: { type: DataTypes.STRING, allowNull: false, unique: true },
		gxp: { type: DataTypes.BOOLEAN, allowNull: false, defaultValue: false },
		version: { type: DataTypes.INTEGER, allowNull: false, defaultValue: 1 },
		created_at
	},
	memberships: {
		id,
		user_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'users', key: 'id' } },
		group_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'groups', key: 'id' } },
		role: { type: DataTypes.STRING, allowNull: false },
		created_at
	},
	invitations: {
		id,
		group_id: { type: DataTypes.UUID, allowNull: true, references: { model: 'groups', key: 'id' } },
		email: { type: DataTypes.STRING, allowNull: false },
		role: { type: DataTypes.STRING, allowNull: true },
		site_admin: { type: DataTypes.BOOLEAN, allowNull: false, defaultValue: false },
		token_hash: { type: DataTypes.STRING, allowNull: false, unique: true },
		expires_at: { type: DataTypes.DATE, allowNull: false },
		used_at: { type: DataTypes.DATE, allowNull: true },
		revoked_at: { type: DataTypes.DATE, allowNull: true },
		invited_by_id: { type: DataTypes.UUID, allowNull: true, references: { model: 'users', key: 'id' } },
		created_at
	},
	password_resets: {
		id,
		user_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'users', key: 'id' } },
		token_hash: { type: DataTypes.STRING, allowNull: false, unique: true },
		expires_at: { type: DataTypes.DATE, allowNull: false },
		used_at: { type: DataTypes.DATE, allowNull: true },
		created_at
	},
	sign_in_attempts: {
		id,
		key: { type: DataTypes.STRING, allowNull: false, unique: true },
		failures: { type: DataTypes.INTEGER, allowNull: false, defaultValue: 0 },
		locked_until: { type: DataTypes.DATE, allowNull: true },
		last_failed_at: { type: DataTypes.DATE, allowNull: true },
		created_at
	},
	api_tokens: {
		id,
		user_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'users', key: 'id' } },
		name: { type: DataTypes.STRING, allowNull: false },
		scopes: { type: DataTypes.JSON, allowNull: false },
		token_hash: { type: DataTypes.STRING, allowNull: false, unique: true },
		expires_at: { type: DataTypes.DATE, allowNull: false },
		revoked_at: { type: DataTypes.DATE, allowNull: true },
		last_used_at: { type: DataTypes.DATE, allowNull: true },
		created_at
	},
	studies: {
		id,
		group_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'groups', key: 'id' } },
		name: { type: DataTypes.STRING, allowNull: false },
		decision: { type: DataTypes.TEXT, allowNull: false },
		version: { type: DataTypes.INTEGER, allowNull: false, defaultValue: 1 },
		archived_at: { type: DataTypes.DATE, allowNull: true },
		created_by_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'users', key: 'id' } },
		updated_at: { type: DataTypes.DATE, allowNull: false },
		created_at
	},
	criteria: {
		id,
		study_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'studies', key: 'id' } },
		position: { type: DataTypes.INTEGER, allowNull: false },
		content: { type: DataTypes.JSON, allowNull: false },
		created_at
	},
	schemes: {
		id,
		study_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'studies', key: 'id' } },
		group_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'groups', key: 'id' } },
		name: { type: DataTypes.STRING, allowNull: false },
		position: { type: DataTypes.INTEGER, allowNull: false },
		version: { type: DataTypes.INTEGER, allowNull: false, defaultValue: 1 },
		archived_at: { type: DataTypes.DATE, allowNull: true },
		created_by_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'users', key: 'id' } },
		updated_at: { type: DataTypes.DATE, allowNull: false },
		created_at
	},
	scheme_versions: {
		id,
		scheme_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'schemes', key: 'id' } },
		number: { type: DataTypes.INTEGER, allowNull: false },
		content: { type: DataTypes.JSON, allowNull: false },
		content_hash: { type: DataTypes.STRING, allowNull: false },
		created_by_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'users', key: 'id' } },
		created_at
	},
	sheets: {
		id,
		study_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'studies', key: 'id' } },
		group_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'groups', key: 'id' } },
		file_name: { type: DataTypes.STRING, allowNull: false },
		media_type: { type: DataTypes.STRING, allowNull: false },
		size: { type: DataTypes.INTEGER, allowNull: false },
		sha256: { type: DataTypes.STRING, allowNull: false },
		bytes: { type: DataTypes.BLOB('long'), allowNull: false },
		reading: { type: DataTypes.JSON, allowNull: true },
		work: { type: DataTypes.JSON, allowNull: true },
		version: { type: DataTypes.INTEGER, allowNull: false, defaultValue: 1 },
		uploaded_by_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'users', key: 'id' } },
		created_at
	},
	mappings: {
		id,
		group_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'groups', key: 'id' } },
		header_signature: { type: DataTypes.STRING, allowNull: false },
		content: { type: DataTypes.JSON, allowNull: false },
		created_by_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'users', key: 'id' } },
		updated_at: { type: DataTypes.DATE, allowNull: false },
		created_at
	},
	runs: {
		id,
		study_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'studies', key: 'id' } },
		group_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'groups', key: 'id' } },
		number: { type: DataTypes.INTEGER, allowNull: false },
		name: { type: DataTypes.STRING, allowNull: false },
		current_revision_id: { type: DataTypes.STRING, allowNull: true },
		version: { type: DataTypes.INTEGER, allowNull: false, defaultValue: 1 },
		archived_at: { type: DataTypes.DATE, allowNull: true },
		created_by_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'users', key: 'id' } },
		updated_at: { type: DataTypes.DATE, allowNull: false },
		created_at
	},
	run_revisions: {
		id,
		run_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'runs', key: 'id' } },
		number: { type: DataTypes.INTEGER, allowNull: false },
		sheet_id: { type: DataTypes.UUID, allowNull: true, references: { model: 'sheets', key: 'id' } },
		table_key: { type: DataTypes.STRING, allowNull: true },
		content: { type: DataTypes.JSON, allowNull: false },
		content_hash: { type: DataTypes.STRING, allowNull: false },
		reason: { type: DataTypes.TEXT, allowNull: true },
		created_by_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'users', key: 'id' } },
		created_at
	},
	jobs: {
		id,
		kind: { type: DataTypes.STRING, allowNull: false },
		group_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'groups', key: 'id' } },
		study_id: { type: DataTypes.UUID, allowNull: true, references: { model: 'studies', key: 'id' } },
		status: { type: DataTypes.STRING, allowNull: false },
		input: { type: DataTypes.JSON, allowNull: false },
		input_hash: { type: DataTypes.STRING, allowNull: false },
		progress: { type: DataTypes.JSON, allowNull: true },
		error: { type: DataTypes.TEXT, allowNull: true },
		attempts: { type: DataTypes.INTEGER, allowNull: false, defaultValue: 0 },
		heartbeat_at: { type: DataTypes.DATE, allowNull: true },
		started_at: { type: DataTypes.DATE, allowNull: true },
		finished_at: { type: DataTypes.DATE, allowNull: true },
		cancel_requested_at: { type: DataTypes.DATE, allowNull: true },
		created_by_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'users', key: 'id' } },
		created_at
	},
	job_events: {
		id,
		job_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'jobs', key: 'id' } },
		seq: { type: DataTypes.INTEGER, allowNull: false },
		type: { type: DataTypes.STRING, allowNull: false },
		data: { type: DataTypes.JSON, allowNull: false },
		created_at
	},
	fits: {
		id,
		study_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'studies', key: 'id' } },
		group_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'groups', key: 'id' } },
		number: { type: DataTypes.INTEGER, allowNull: false },
		scheme_version_id: {
			type: DataTypes.UUID,
			allowNull: false,
			references: { model: 'scheme_versions', key: 'id' }
		},
		request: { type: DataTypes.JSON, allowNull: false },
		input_hash: { type: DataTypes.STRING, allowNull: false },
		engine_version: { type: DataTypes.STRING, allowNull: false },
		seed: { type: DataTypes.INTEGER, allowNull: false },
		report: { type: DataTypes.JSON, allowNull: false },
		started_at: { type: DataTypes.DATE, allowNull: false },
		finished_at: { type: DataTypes.DATE, allowNull: false },
		created_by_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'users', key: 'id' } },
		created_at
	},
	fit_runs: {
		id,
		fit_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'fits', key: 'id' } },
		run_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'runs', key: 'id' } },
		run_revision_id: {
			type: DataTypes.UUID,
			allowNull: false,
			references: { model: 'run_revisions', key: 'id' }
		},
		position: { type: DataTypes.INTEGER, allowNull: false },
		created_at
	},
	windows: {
		id,
		study_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'studies', key: 'id' } },
		group_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'groups', key: 'id' } },
		fit_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'fits', key: 'id' } },
		number: { type: DataTypes.INTEGER, allowNull: false },
		kind: { type: DataTypes.STRING, allowNull: false },
		input: { type: DataTypes.JSON, allowNull: false },
		result: { type: DataTypes.JSON, allowNull: false },
		engine_version: { type: DataTypes.STRING, allowNull: false },
		seed: { type: DataTypes.INTEGER, allowNull: false },
		created_by_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'users', key: 'id' } },
		created_at
	},
	recipes: {
		id,
		study_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'studies', key: 'id' } },
		group_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'groups', key: 'id' } },
		number: { type: DataTypes.INTEGER, allowNull: false },
		title: { type: DataTypes.STRING, allowNull: false },
		version: { type: DataTypes.INTEGER, allowNull: false, defaultValue: 1 },
		created_by_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'users', key: 'id' } },
		updated_at: { type: DataTypes.DATE, allowNull: false },
		created_at
	},
	recipe_versions: {
		id,
		recipe_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'recipes', key: 'id' } },
		number: { type: DataTypes.INTEGER, allowNull: false },
		state: { type: DataTypes.STRING, allowNull: false },
		content: { type: DataTypes.JSON, allowNull: false },
		content_hash: { type: DataTypes.STRING, allowNull: false },
		fit_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'fits', key: 'id' } },
		window_id: { type: DataTypes.UUID, allowNull: true, references: { model: 'windows', key: 'id' } },
		version: { type: DataTypes.INTEGER, allowNull: false, defaultValue: 1 },
		reason: { type: DataTypes.TEXT, allowNull: true },
		author_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'users', key: 'id' } },
		contributor_ids: { type: DataTypes.JSON, allowNull: false },
		submitted_at: { type: DataTypes.DATE, allowNull: true },
		updated_at: { type: DataTypes.DATE, allowNull: false },
		created_at
	},
	review_comments: {
		id,
		recipe_version_id: {
			type: DataTypes.UUID,
			allowNull: false,
			references: { model: 'recipe_versions', key: 'id' }
		},
		user_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'users', key: 'id' } },
		printed_name: { type: DataTypes.STRING, allowNull: false },
		text: { type: DataTypes.TEXT, allowNull: false },
		anchor: { type: DataTypes.STRING, allowNull: true },
		created_at
	},
	signatures: {
		id,
		recipe_version_id: {
			type: DataTypes.UUID,
			allowNull: false,
			references: { model: 'recipe_versions', key: 'id' }
		},
		user_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'users', key: 'id' } },
		printed_name: { type: DataTypes.STRING, allowNull: false },
		meaning: { type: DataTypes.STRING, allowNull: false },
		content_hash: { type: DataTypes.STRING, allowNull: false },
		comment: { type: DataTypes.TEXT, allowNull: true },
		detail: { type: DataTypes.JSON, allowNull: true },
		signed_at: { type: DataTypes.DATE, allowNull: false },
		created_at
	},
	shares: {
		id,
		recipe_version_id: {
			type: DataTypes.UUID,
			allowNull: false,
			references: { model: 'recipe_versions', key: 'id' }
		},
		group_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'groups', key: 'id' } },
		shared_by_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'users', key: 'id' } },
		ended_at: { type: DataTypes.DATE, allowNull: true },
		created_at
	},
	caution_acknowledgements: {
		id,
		recipe_version_id: {
			type: DataTypes.UUID,
			allowNull: false,
			references: { model: 'recipe_versions', key: 'id' }
		},
		caution_key: { type: DataTypes.STRING, allowNull: false },
		user_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'users', key: 'id' } },
		printed_name: { type: DataTypes.STRING, allowNull: false },
		group_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'groups', key: 'id' } },
		created_at
	},
	exports: {
		id,
		recipe_version_id: {
			type: DataTypes.UUID,
			allowNull: false,
			references: { model: 'recipe_versions', key: 'id' }
		},
		group_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'groups', key: 'id' } },
		sha256: { type: DataTypes.STRING, allowNull: false },
		size: { type: DataTypes.INTEGER, allowNull: false },
		bytes: { type: DataTypes.BLOB('long'), allowNull: false },
		exported_by_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'users', key: 'id' } },
		created_at
	},
	mail_outbox: {
		id,
		to: { type: DataTypes.STRING, allowNull: false },
		subject: { type: DataTypes.STRING, allowNull: false },
		text: { type: DataTypes.TEXT, allowNull: false },
		status: { type: DataTypes.STRING, allowNull: false, defaultValue: 'queued' },
		attempts: { type: DataTypes.INTEGER, allowNull: false, defaultValue: 0 },
		next_attempt_at: { type: DataTypes.DATE, allowNull: false },
		sent_at: { type: DataTypes.DATE, allowNull: true },
		error: { type: DataTypes.TEXT, allowNull: true },
		created_at
	},
	settings: {
		id,
		key: { type: DataTypes.STRING, allowNull: false, unique: true },
		value: { type: DataTypes.JSON, allowNull: false },
		version: { type: DataTypes.INTEGER, allowNull: false, defaultValue: 1 },
		updated_by_id: { type: DataTypes.UUID, allowNull: true, references: { model: 'users', key: 'id' } },
		updated_at: { type: DataTypes.DATE, allowNull: false },
		created_at
	},
	idempotency_keys: {
		id,
		user_id: { type: DataTypes.UUID, allowNull: false, references: { model: 'users', key: 'id' } },
		key: { type: DataTypes.STRING, allowNull: false },
		request_hash: { type: DataTypes.STRING, allowNull: false },
		status: { type: DataTypes.INTEGER, allowNull: false },
		body: { type: DataTypes.JSON, allowNull: true },
		created_at
	}
};

const text = { type: DataTypes.STRING, allowNull: false };
const AUDIT: Parameters<QueryInterface['createTable']>[1] = {
	seq: { type: DataTypes.INTEGER, primaryKey: true, allowNull: false },
	at: text,
	user_id: { type: DataTypes.UUID, allowNull: true },
	printed_name: text,
	role: { type: DataTypes.STRING, allowNull: true },
	source: text,
	group_id: { type: DataTypes.UUID, allowNull: true },
	study_id: { type: DataTypes.UUID, allowNull: true },
	object_type: text,
	object_id: { type: DataTypes.UUID, allowNull: true },
	object_version: { type: DataTypes.INTEGER, allowNull: true },
	type: text,
	payload: { type: DataTypes.TEXT, allowNull: false },
	reason: { type: DataTypes.TEXT, allowNull: true },
	prev_hash: text,
	hash: text
};

const UNIQUE: [string, string[]][] = [
	['memberships', ['user_id', 'group_id']],
	['scheme_versions', ['scheme_id', 'number']],
	['runs', ['study_id', 'number']],
	['run_revisions', ['run_id', 'number']],
	['job_events', ['job_id', 'seq']],
	['fits', ['study_id', 'number']],
	['recipes', ['study_id', 'number']],
	['recipe_versions', ['recipe_id', 'number']],
	['mappings', ['group_id', 'header_signature']],
	['caution_acknowledgements', ['recipe_version_id', 'caution_key', 'user_id']],
	['idempotency_keys', ['user_id', 'key']]
];

const INDEXES: [string, string[]][] = [
	['studies', ['group_id', 'id']],
	['criteria', ['study_id']],
	['schemes', ['study_id']],
	['sheets', ['study_id']],
	['sheets', ['group_id', 'sha256']],
	['jobs', ['status']],
	['jobs', ['study_id']],
	['fit_runs', ['fit_id']],
	['fit_runs', ['run_revision_id']],
	['windows', ['fit_id']],
	['windows', ['study_id']],
	['recipes', ['group_id', 'id']],
	['signatures', ['recipe_version_id']],
	['review_comments', ['recipe_version_id']],
	['shares', ['group_id']],
	['shares', ['recipe_version_id']],
	['audit_events', ['group_id', 'seq']],
	['audit_events', ['object_id', 'seq']],
	['audit_events', ['study_id', 'seq']],
	['mail_outbox', ['status', 'next_attempt_at']]
];

/** Records that are evidence: the database itself refuses to change or remove them. */
const APPEND_ONLY = [
	'audit_events',
	'signatures',
	'fits',
	'fit_runs',
	'windows',
	'exports',
	'scheme_versions',
	'run_revisions'
];

async function refuseChanges(q: QueryInterface, table: string): Promise<void> {
	for (const verb of ['UPDATE', 'DELETE'])
		await q.sequelize.query(
			`CREATE TRIGGER ${table}_refuse_${verb.toLowerCase()} BEFORE ${verb} ON ${table}
			 BEGIN SELECT RAISE(ABORT, '${table} is append-only'); END`
		);
}

export async function up(q: QueryInterface): Promise<void> {
	for (const [table, columns] of Object.entries(TABLES)) await q.createTable(table, columns);
	await q.createTable('audit_events', AUDIT);
	for (const [table, fields] of UNIQUE)
		await q.addIndex(table, fields, { unique: true, name: `${table}_${fields.join('_')}_unique` });
	for (const [table, fields] of INDEXES)
		await q.addIndex(table, fields, { name: `${table}_${fields.join('_')}_index` });
	for (const table of APPEND_ONLY) await refuseChanges(q, table);
	// The received bytes of a sheet never change; what was read from them may be worked on.
	await q.sequelize.query(
		`CREATE TRIGGER sheets_refuse_change BEFORE UPDATE OF bytes, sha256, file_name, size ON sheets
		 BEGIN SELECT RAISE(ABORT, 'a sheet stays as received'); END`
	);
	await q.sequelize.query(
		`CREATE TRIGGER sheets_refuse_delete BEFORE DELETE ON sheets
		 BEGIN SELECT RAISE(ABORT, 'a sheet stays as received'); END`
	);
}
