// How a deliverable is measured: plans written once, presentations that belong to a plan (none: the whole file), the
// measurements that stand now, and what a submission froze of each presentation. No indexes of its own: keys serve.
import type { Knex } from 'knex';

const sql = String.raw;

export async function up(knex: Knex): Promise<void> {
  await knex.raw(sql`
    CREATE TABLE measuring_plans (
      id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
      organisation_id uuid NOT NULL REFERENCES organisations,
      deliverable_id uuid NOT NULL,
      body jsonb NOT NULL,
      -- The same as that of the measurements made by it.
      parameters_hash text NOT NULL CHECK (parameters_hash ~ '^[0-9a-f]{64}$'),
      created_by uuid REFERENCES users,
      created_at timestamptz NOT NULL DEFAULT now(),
      FOREIGN KEY (deliverable_id, organisation_id) REFERENCES deliverables (id, organisation_id),
      UNIQUE (id, deliverable_id),
      CONSTRAINT measuring_plans_once_key UNIQUE (deliverable_id, parameters_hash)
    );
    CREATE TRIGGER measuring_plans_immutable BEFORE UPDATE OR DELETE ON measuring_plans
      FOR EACH ROW EXECUTE FUNCTION refuse_change();

    -- null: the whole file as one presentation, in the order that it tells.
    ALTER TABLE deliverables ADD COLUMN plan_id uuid,
      -- Frames a second by which its times are counted, where the file tells none.
      ADD COLUMN frame_rate text,
      ADD CONSTRAINT deliverables_plan_fkey FOREIGN KEY (plan_id, id) REFERENCES measuring_plans (id, deliverable_id);

    ALTER TABLE presentations DROP CONSTRAINT presentations_deliverable_id_position_key,
      ADD COLUMN plan_id uuid,
      ADD COLUMN speakers text[] NOT NULL DEFAULT '{}',
      ADD FOREIGN KEY (plan_id, deliverable_id) REFERENCES measuring_plans (id, deliverable_id),
      ADD CONSTRAINT presentations_plan_position_key UNIQUE NULLS NOT DISTINCT (deliverable_id, plan_id, position);

    -- The newest measurement of each presentation of the plan that a deliverable is measured by now.
    CREATE VIEW current_measurements AS
      SELECT DISTINCT ON (m.deliverable_id, pr.position) m.*, pr.position, pr.name AS presentation_name,
        pr.audio_channels, pr.speakers, pr.layout AS presentation_layout
      FROM measurements m
      JOIN presentations pr ON pr.id = m.presentation_id
      JOIN deliverables d ON d.id = m.deliverable_id AND d.plan_id IS NOT DISTINCT FROM pr.plan_id
      ORDER BY m.deliverable_id, pr.position, m.created_at DESC, m.id DESC;

    -- Every presentation that a submission froze. The submission's own row names the first one's measurement and the worst verdict.
    CREATE TABLE submission_measurements (
      submission_id uuid NOT NULL REFERENCES submissions,
      organisation_id uuid NOT NULL REFERENCES organisations,
      position integer NOT NULL CHECK (position > 0),
      name text NOT NULL,
      measurement_id uuid NOT NULL,
      verdict_id uuid NOT NULL REFERENCES verdicts,
      PRIMARY KEY (submission_id, position),
      FOREIGN KEY (measurement_id, organisation_id) REFERENCES measurements (id, organisation_id)
    );
    INSERT INTO submission_measurements (submission_id, organisation_id, position, name, measurement_id, verdict_id)
      SELECT s.id, s.organisation_id, 1, pr.name, s.measurement_id, s.verdict_id
      FROM submissions s JOIN measurements m ON m.id = s.measurement_id JOIN presentations pr ON pr.id = m.presentation_id;
    CREATE TRIGGER submission_measurements_immutable BEFORE UPDATE OR DELETE ON submission_measurements
      FOR EACH ROW EXECUTE FUNCTION refuse_change();

    GRANT SELECT, INSERT ON measuring_plans, submission_measurements TO plimsoll_app;
    GRANT SELECT ON current_measurements TO plimsoll_app;
  `);
}

export async function down(knex: Knex): Promise<void> {
  await knex.raw(sql`
    DROP TABLE submission_measurements;
    DROP VIEW current_measurements;
    ALTER TABLE deliverables DROP COLUMN plan_id, DROP COLUMN frame_rate;
    ALTER TABLE presentations DROP CONSTRAINT presentations_plan_position_key;
    UPDATE presentations p SET position = n.position FROM (
      SELECT id, row_number() OVER (PARTITION BY deliverable_id ORDER BY plan_id NULLS FIRST, position) AS position
      FROM presentations) n WHERE n.id = p.id;
    ALTER TABLE presentations DROP COLUMN plan_id, DROP COLUMN speakers,
      ADD CONSTRAINT presentations_deliverable_id_position_key UNIQUE (deliverable_id, position);
    DROP TABLE measuring_plans;
  `);
}
