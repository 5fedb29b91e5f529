// The whole first form of the data: tenancy, people, channels, specs, deliverables, measurements, submissions, mail, audit.
// Indexes are named <table>_<columns>_idx; constraints say the rules of PRODUCT.md, triggers refuse what may never change.
// Over 400 lines, as one: the tables refer to one another, and nothing of it stands without the rest.
import type { Knex } from 'knex';

const sql = String.raw;

const up_sql = sql`
DO $$ BEGIN
  IF NOT EXISTS (SELECT FROM pg_roles WHERE rolname = 'plimsoll_app') THEN CREATE ROLE plimsoll_app NOLOGIN; END IF;
END $$;

-- People and tenants ------------------------------------------------------------------------------------------

CREATE TABLE organisations (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  name text NOT NULL CHECK (length(btrim(name)) BETWEEN 1 AND 120),
  slug text NOT NULL UNIQUE CHECK (slug ~ '^[a-z0-9]+(-[a-z0-9]+)*$'),
  is_supplier boolean NOT NULL DEFAULT false,
  is_distributor boolean NOT NULL DEFAULT false,
  time_zone text NOT NULL DEFAULT 'Etc/UTC',
  created_at timestamptz NOT NULL DEFAULT now(),
  CHECK (is_supplier OR is_distributor)
);

CREATE TABLE users (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  email text NOT NULL CHECK (email = lower(email) AND position('@' in email) > 1),
  name text NOT NULL CHECK (length(btrim(name)) BETWEEN 1 AND 120),
  password_hash text,
  session_version integer NOT NULL DEFAULT 1,
  created_at timestamptz NOT NULL DEFAULT now(),
  CONSTRAINT users_email_key UNIQUE (email)
);

CREATE TABLE memberships (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organisation_id uuid NOT NULL REFERENCES organisations,
  user_id uuid NOT NULL REFERENCES users,
  created_at timestamptz NOT NULL DEFAULT now(),
  removed_at timestamptz,
  CONSTRAINT memberships_organisation_user_key UNIQUE (organisation_id, user_id)
);
CREATE INDEX memberships_user_id_idx ON memberships (user_id) WHERE removed_at IS NULL;

CREATE TABLE membership_roles (
  membership_id uuid NOT NULL REFERENCES memberships ON DELETE CASCADE,
  organisation_id uuid NOT NULL REFERENCES organisations,
  role text NOT NULL CHECK (role IN ('mix_engineer', 'qc_operator', 'spec_owner', 'administrator')),
  PRIMARY KEY (membership_id, role)
);

CREATE TABLE sessions (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  user_id uuid NOT NULL REFERENCES users,
  -- The organisation that the person works in; they may belong to several and change.
  organisation_id uuid NOT NULL REFERENCES organisations,
  user_agent text NOT NULL DEFAULT '',
  created_at timestamptz NOT NULL DEFAULT now(),
  last_seen_at timestamptz NOT NULL DEFAULT now(),
  expires_at timestamptz NOT NULL,
  revoked_at timestamptz
);
CREATE INDEX sessions_user_id_idx ON sessions (user_id) WHERE revoked_at IS NULL;

CREATE TABLE one_time_links (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  kind text NOT NULL CHECK (kind IN ('invitation', 'password_reset')),
  token_hash bytea NOT NULL UNIQUE,
  email text NOT NULL CHECK (email = lower(email)),
  user_id uuid REFERENCES users,
  organisation_id uuid REFERENCES organisations,
  roles text[] NOT NULL DEFAULT '{}',
  created_by uuid REFERENCES users,
  created_at timestamptz NOT NULL DEFAULT now(),
  expires_at timestamptz NOT NULL,
  used_at timestamptz,
  CHECK (kind <> 'invitation' OR (organisation_id IS NOT NULL AND cardinality(roles) > 0)),
  CHECK (kind <> 'password_reset' OR user_id IS NOT NULL)
);

-- Channels and specs ------------------------------------------------------------------------------------------

CREATE TABLE channels (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organisation_id uuid NOT NULL REFERENCES organisations,
  name text NOT NULL CHECK (length(btrim(name)) BETWEEN 1 AND 120),
  kind text NOT NULL CHECK (kind IN ('television', 'radio', 'podcast', 'online')),
  time_zone text NOT NULL,
  created_at timestamptz NOT NULL DEFAULT now(),
  archived_at timestamptz,
  UNIQUE (organisation_id, name),
  UNIQUE (id, organisation_id)
);

CREATE TABLE agreements (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organisation_id uuid NOT NULL REFERENCES organisations,
  channel_id uuid NOT NULL,
  supplier_id uuid NOT NULL REFERENCES organisations,
  created_at timestamptz NOT NULL DEFAULT now(),
  ended_at timestamptz,
  FOREIGN KEY (channel_id, organisation_id) REFERENCES channels (id, organisation_id)
);
CREATE UNIQUE INDEX agreements_channel_supplier_idx ON agreements (channel_id, supplier_id) WHERE ended_at IS NULL;
CREATE INDEX agreements_supplier_id_idx ON agreements (supplier_id);

CREATE TABLE specs (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organisation_id uuid NOT NULL REFERENCES organisations,
  name text NOT NULL CHECK (length(btrim(name)) BETWEEN 1 AND 120),
  created_by uuid REFERENCES users,
  created_at timestamptz NOT NULL DEFAULT now(),
  archived_at timestamptz,
  UNIQUE (organisation_id, name),
  UNIQUE (id, organisation_id)
);

CREATE TABLE spec_versions (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organisation_id uuid NOT NULL REFERENCES organisations,
  spec_id uuid NOT NULL,
  -- Numbered when published; a draft has none, and a spec has one draft at most.
  number integer CHECK (number > 0),
  body jsonb NOT NULL,
  change_note text NOT NULL DEFAULT '',
  created_by uuid REFERENCES users,
  created_at timestamptz NOT NULL DEFAULT now(),
  updated_at timestamptz NOT NULL DEFAULT now(),
  published_by uuid REFERENCES users,
  published_at timestamptz,
  in_force_from timestamptz,
  FOREIGN KEY (spec_id, organisation_id) REFERENCES specs (id, organisation_id),
  UNIQUE (spec_id, number),
  CHECK ((published_at IS NULL) = (number IS NULL) AND (published_at IS NULL) = (in_force_from IS NULL))
);
CREATE UNIQUE INDEX spec_versions_one_draft_idx ON spec_versions (spec_id) WHERE published_at IS NULL;

-- From a date, a channel holds a kind of content to a spec; the version is the newest of that spec in force.
CREATE TABLE channel_assignments (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organisation_id uuid NOT NULL REFERENCES organisations,
  channel_id uuid NOT NULL,
  content_kind text NOT NULL CHECK (content_kind IN ('long_form', 'short_form', 'trailer', 'podcast_episode', 'music_programme')),
  spec_id uuid NOT NULL,
  in_force_from timestamptz NOT NULL,
  created_by uuid REFERENCES users,
  created_at timestamptz NOT NULL DEFAULT now(),
  FOREIGN KEY (channel_id, organisation_id) REFERENCES channels (id, organisation_id),
  FOREIGN KEY (spec_id, organisation_id) REFERENCES specs (id, organisation_id),
  CONSTRAINT channel_assignments_moment_key UNIQUE (channel_id, content_kind, in_force_from)
);

-- Which spec version a channel holds a kind of content to at a moment.
CREATE FUNCTION spec_version_in_force(a_channel uuid, a_kind text, a_moment timestamptz) RETURNS uuid LANGUAGE sql STABLE AS $$
  SELECT v.id FROM (
    SELECT spec_id FROM channel_assignments
    WHERE channel_id = a_channel AND content_kind = a_kind AND in_force_from <= a_moment
    ORDER BY in_force_from DESC LIMIT 1) a
  JOIN spec_versions v ON v.spec_id = a.spec_id AND v.published_at IS NOT NULL AND v.in_force_from <= a_moment
  ORDER BY v.in_force_from DESC, v.number DESC LIMIT 1
$$;

-- Deliverables ------------------------------------------------------------------------------------------------

CREATE TABLE programmes (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organisation_id uuid NOT NULL REFERENCES organisations,
  title text NOT NULL CHECK (length(btrim(title)) BETWEEN 1 AND 200),
  created_at timestamptz NOT NULL DEFAULT now(),
  UNIQUE (id, organisation_id)
);
CREATE UNIQUE INDEX programmes_title_idx ON programmes (organisation_id, lower(title));

CREATE TABLE episodes (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organisation_id uuid NOT NULL REFERENCES organisations,
  programme_id uuid NOT NULL,
  label text NOT NULL CHECK (length(btrim(label)) BETWEEN 1 AND 80),
  created_at timestamptz NOT NULL DEFAULT now(),
  FOREIGN KEY (programme_id, organisation_id) REFERENCES programmes (id, organisation_id),
  UNIQUE (id, organisation_id)
);
CREATE UNIQUE INDEX episodes_label_idx ON episodes (programme_id, lower(label));

CREATE TABLE deliverables (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organisation_id uuid NOT NULL REFERENCES organisations,
  uploaded_by uuid NOT NULL REFERENCES users,
  file_name text NOT NULL CHECK (length(file_name) BETWEEN 1 AND 255),
  byte_size bigint NOT NULL CHECK (byte_size > 0 AND byte_size <= 68719476736),
  storage_key text NOT NULL UNIQUE,
  -- Hash as the browser told it, and as the worker read it from storage.
  sha256_declared text CHECK (sha256_declared ~ '^[0-9a-f]{64}$'),
  sha256 text CHECK (sha256 ~ '^[0-9a-f]{64}$'),
  state text NOT NULL DEFAULT 'uploading' CHECK (state IN ('uploading', 'waiting', 'measuring', 'measured', 'unreadable')),
  -- Why it is unreadable: a stable code and a sentence that a mix engineer can act on.
  reason_code text,
  reason text,
  measure_attempts integer NOT NULL DEFAULT 0,
  programme_id uuid,
  episode_id uuid,
  version_label text NOT NULL DEFAULT '',
  content_kind text NOT NULL DEFAULT 'long_form' CHECK (content_kind IN ('long_form', 'short_form', 'trailer', 'podcast_episode', 'music_programme')),
  replaces_id uuid,
  created_at timestamptz NOT NULL DEFAULT now(),
  uploaded_at timestamptz,
  measured_at timestamptz,
  discarded_at timestamptz,
  FOREIGN KEY (programme_id, organisation_id) REFERENCES programmes (id, organisation_id),
  FOREIGN KEY (episode_id, organisation_id) REFERENCES episodes (id, organisation_id),
  UNIQUE (id, organisation_id),
  FOREIGN KEY (replaces_id, organisation_id) REFERENCES deliverables (id, organisation_id),
  CHECK ((state = 'unreadable') = (reason IS NOT NULL) AND (reason IS NULL) = (reason_code IS NULL))
);
CREATE INDEX deliverables_created_idx ON deliverables (organisation_id, created_at DESC, id DESC);
CREATE INDEX deliverables_sha256_idx ON deliverables (organisation_id, sha256);
CREATE INDEX deliverables_state_idx ON deliverables (state) WHERE state IN ('waiting', 'measuring');

CREATE TABLE uploads (
  deliverable_id uuid PRIMARY KEY,
  organisation_id uuid NOT NULL REFERENCES organisations,
  storage_upload_id text NOT NULL,
  part_bytes bigint NOT NULL CHECK (part_bytes >= 5242880),
  part_count integer NOT NULL CHECK (part_count BETWEEN 1 AND 10000),
  -- Name, size and time of change of the file: how the same file is recognised when it is picked again.
  last_modified_ms bigint NOT NULL,
  created_at timestamptz NOT NULL DEFAULT now(),
  completed_at timestamptz,
  aborted_at timestamptz,
  FOREIGN KEY (deliverable_id, organisation_id) REFERENCES deliverables (id, organisation_id)
);
CREATE TABLE upload_parts (
  deliverable_id uuid NOT NULL REFERENCES uploads (deliverable_id) ON DELETE CASCADE,
  organisation_id uuid NOT NULL REFERENCES organisations,
  number integer NOT NULL CHECK (number BETWEEN 1 AND 10000),
  etag text NOT NULL,
  byte_size bigint NOT NULL CHECK (byte_size > 0),
  PRIMARY KEY (deliverable_id, number)
);

CREATE TABLE presentations (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organisation_id uuid NOT NULL REFERENCES organisations,
  deliverable_id uuid NOT NULL,
  position integer NOT NULL DEFAULT 1 CHECK (position > 0),
  name text NOT NULL,
  -- Audio channels of the file that play together, from 0 and in order; empty: all of them.
  audio_channels integer[] NOT NULL DEFAULT '{}',
  layout text,
  created_at timestamptz NOT NULL DEFAULT now(),
  FOREIGN KEY (deliverable_id, organisation_id) REFERENCES deliverables (id, organisation_id),
  UNIQUE (id, organisation_id),
  UNIQUE (deliverable_id, position)
);

CREATE TABLE measurements (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organisation_id uuid NOT NULL REFERENCES organisations,
  deliverable_id uuid NOT NULL,
  presentation_id uuid NOT NULL,
  engine_version text NOT NULL,
  -- Of the window, audio-channel order, stream and decoder that the measurement was made with.
  parameters_hash text NOT NULL,
  sha256 text NOT NULL CHECK (sha256 ~ '^[0-9a-f]{64}$'),
  format jsonb NOT NULL,
  figures jsonb NOT NULL,
  findings jsonb NOT NULL,
  series_key text NOT NULL,
  measuring_seconds double precision NOT NULL,
  created_at timestamptz NOT NULL DEFAULT now(),
  FOREIGN KEY (deliverable_id, organisation_id) REFERENCES deliverables (id, organisation_id),
  FOREIGN KEY (presentation_id, organisation_id) REFERENCES presentations (id, organisation_id),
  UNIQUE (id, organisation_id),
  CONSTRAINT measurements_once_key UNIQUE (deliverable_id, presentation_id, engine_version, parameters_hash)
);

CREATE TABLE verdicts (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organisation_id uuid NOT NULL REFERENCES organisations,
  measurement_id uuid NOT NULL,
  spec_version_id uuid NOT NULL REFERENCES spec_versions,
  outcome text NOT NULL CHECK (outcome IN ('pass', 'advisory', 'fail')),
  body jsonb NOT NULL,
  created_at timestamptz NOT NULL DEFAULT now(),
  FOREIGN KEY (measurement_id, organisation_id) REFERENCES measurements (id, organisation_id),
  UNIQUE (id, organisation_id),
  CONSTRAINT verdicts_once_key UNIQUE (measurement_id, spec_version_id)
);

-- Which channels a deliverable is for, with the verdict under the version now in force (null: not judged yet, or no spec).
CREATE TABLE deliverable_channels (
  deliverable_id uuid NOT NULL,
  organisation_id uuid NOT NULL REFERENCES organisations,
  channel_id uuid NOT NULL REFERENCES channels,
  verdict_id uuid REFERENCES verdicts,
  created_at timestamptz NOT NULL DEFAULT now(),
  PRIMARY KEY (deliverable_id, channel_id),
  FOREIGN KEY (deliverable_id, organisation_id) REFERENCES deliverables (id, organisation_id)
);
CREATE INDEX deliverable_channels_channel_idx ON deliverable_channels (channel_id);

-- Submissions -------------------------------------------------------------------------------------------------

-- Freezes file, hash, measurement (and with it the engine) and spec version together. Readable by both sides.
CREATE TABLE submissions (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organisation_id uuid NOT NULL REFERENCES organisations,
  distributor_id uuid NOT NULL REFERENCES organisations,
  channel_id uuid NOT NULL,
  deliverable_id uuid NOT NULL,
  measurement_id uuid NOT NULL,
  spec_version_id uuid NOT NULL REFERENCES spec_versions,
  verdict_id uuid NOT NULL REFERENCES verdicts,
  sha256 text NOT NULL,
  state text NOT NULL DEFAULT 'awaiting_review' CHECK (state IN ('awaiting_review', 'approved', 'approved_with_waiver', 'rejected', 'withdrawn', 'replaced')),
  -- Grows with every change of state; a decision names the one that it saw.
  version integer NOT NULL DEFAULT 1,
  air_at timestamptz,
  submitted_by uuid NOT NULL REFERENCES users,
  submitted_at timestamptz NOT NULL DEFAULT now(),
  decided_by uuid REFERENCES users,
  decided_at timestamptz,
  decision_reason text,
  failing_rule_ids text[] NOT NULL DEFAULT '{}',
  replaces_id uuid REFERENCES submissions,
  FOREIGN KEY (channel_id, distributor_id) REFERENCES channels (id, organisation_id),
  FOREIGN KEY (deliverable_id, organisation_id) REFERENCES deliverables (id, organisation_id),
  FOREIGN KEY (measurement_id, organisation_id) REFERENCES measurements (id, organisation_id),
  CHECK ((state IN ('approved', 'approved_with_waiver', 'rejected')) <= (decided_by IS NOT NULL AND decided_at IS NOT NULL)),
  CHECK (state <> 'rejected' OR length(btrim(decision_reason)) > 0)
);
CREATE UNIQUE INDEX submissions_open_idx ON submissions (deliverable_id, channel_id) WHERE state IN ('awaiting_review', 'approved', 'approved_with_waiver');
CREATE INDEX submissions_queue_idx ON submissions (distributor_id, state, submitted_at DESC, id DESC);
CREATE INDEX submissions_supplier_idx ON submissions (organisation_id, submitted_at DESC, id DESC);

CREATE TABLE notes (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organisation_id uuid NOT NULL REFERENCES organisations,
  submission_id uuid NOT NULL REFERENCES submissions,
  author_id uuid NOT NULL REFERENCES users,
  at_seconds double precision CHECK (at_seconds >= 0),
  text text NOT NULL CHECK (length(btrim(text)) BETWEEN 1 AND 4000),
  created_at timestamptz NOT NULL DEFAULT now()
);
CREATE INDEX notes_submission_idx ON notes (submission_id, created_at);

CREATE TABLE waivers (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organisation_id uuid NOT NULL REFERENCES organisations,
  submission_id uuid NOT NULL REFERENCES submissions,
  rule_id text NOT NULL,
  reason text NOT NULL CHECK (length(btrim(reason)) > 0),
  waived_by uuid NOT NULL REFERENCES users,
  created_at timestamptz NOT NULL DEFAULT now(),
  UNIQUE (submission_id, rule_id)
);

-- Audit and mail ----------------------------------------------------------------------------------------------

CREATE TABLE audit_events (
  id bigint GENERATED ALWAYS AS IDENTITY PRIMARY KEY,
  organisation_id uuid NOT NULL REFERENCES organisations,
  -- The other side of a submission, who may read the event too.
  counterpart_id uuid REFERENCES organisations,
  actor_id uuid REFERENCES users,
  action text NOT NULL,
  subject_kind text NOT NULL,
  subject_id text NOT NULL,
  detail jsonb NOT NULL DEFAULT '{}',
  created_at timestamptz NOT NULL DEFAULT now()
);
CREATE INDEX audit_events_organisation_idx ON audit_events (organisation_id, id DESC);
CREATE INDEX audit_events_counterpart_idx ON audit_events (counterpart_id, id DESC) WHERE counterpart_id IS NOT NULL;

CREATE TABLE mail_outbox (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organisation_id uuid REFERENCES organisations,
  kind text NOT NULL CHECK (kind IN ('invitation', 'password_reset', 'submission_received', 'submission_approved', 'submission_rejected')),
  to_address text NOT NULL,
  subject text NOT NULL,
  text_body text NOT NULL,
  html_body text NOT NULL,
  message_id text NOT NULL UNIQUE,
  -- What the mail is about, so that taking a decision back can cancel it.
  submission_id uuid REFERENCES submissions,
  state text NOT NULL DEFAULT 'queued' CHECK (state IN ('queued', 'sent', 'failed', 'cancelled')),
  attempts integer NOT NULL DEFAULT 0,
  send_after timestamptz NOT NULL DEFAULT now(),
  last_error text,
  sent_at timestamptz,
  created_at timestamptz NOT NULL DEFAULT now()
);
CREATE INDEX mail_outbox_due_idx ON mail_outbox (send_after) WHERE state = 'queued';

-- What may never change ----------------------------------------------------------------------------------------

CREATE FUNCTION refuse_change() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  RAISE EXCEPTION '% rows are never changed or deleted', TG_TABLE_NAME USING ERRCODE = 'restrict_violation';
END $$;
CREATE TRIGGER measurements_immutable BEFORE UPDATE OR DELETE ON measurements FOR EACH ROW EXECUTE FUNCTION refuse_change();
CREATE TRIGGER verdicts_immutable BEFORE UPDATE OR DELETE ON verdicts FOR EACH ROW EXECUTE FUNCTION refuse_change();
CREATE TRIGGER audit_events_immutable BEFORE UPDATE OR DELETE ON audit_events FOR EACH ROW EXECUTE FUNCTION refuse_change();
CREATE TRIGGER spec_versions_immutable BEFORE UPDATE OR DELETE ON spec_versions FOR EACH ROW
  WHEN (OLD.published_at IS NOT NULL) EXECUTE FUNCTION refuse_change();

GRANT USAGE ON SCHEMA public TO plimsoll_app;
GRANT SELECT, INSERT, UPDATE ON ALL TABLES IN SCHEMA public TO plimsoll_app;
GRANT USAGE ON ALL SEQUENCES IN SCHEMA public TO plimsoll_app;
REVOKE UPDATE ON measurements, verdicts, audit_events FROM plimsoll_app;
GRANT DELETE ON membership_roles, deliverable_channels, upload_parts, waivers, presentations TO plimsoll_app;
GRANT DELETE ON spec_versions TO plimsoll_app; -- drafts only: the trigger refuses the rest
GRANT DELETE ON channel_assignments TO plimsoll_app; -- planned ones that a spec owner takes back
`;

export async function up(knex: Knex): Promise<void> {
  await knex.raw(up_sql);
}

export async function down(knex: Knex): Promise<void> {
  await knex.raw(sql`
    DROP TABLE mail_outbox, audit_events, waivers, notes, submissions, deliverable_channels, verdicts, measurements, presentations,
      upload_parts, uploads, deliverables, episodes, programmes, channel_assignments, spec_versions, specs, agreements, channels,
      one_time_links, sessions, membership_roles, memberships, users, organisations CASCADE;
    DROP FUNCTION refuse_change(); DROP FUNCTION spec_version_in_force(uuid, text, timestamptz);
  `);
}
