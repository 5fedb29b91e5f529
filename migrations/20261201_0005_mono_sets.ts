// Sets of mono files that are one deliverable: its parts are deliverables of their own, discarded when they were taken into it.
// Index: deliverable_parts_part_idx, for the sets that a part stands in.
import type { Knex } from 'knex';

const sql = String.raw;

export async function up(knex: Knex): Promise<void> {
  await knex.raw(sql`
    CREATE TABLE deliverable_parts (
      deliverable_id uuid NOT NULL,
      organisation_id uuid NOT NULL REFERENCES organisations,
      position integer NOT NULL CHECK (position > 0),
      part_id uuid NOT NULL,
      -- The loudspeaker that this file feeds.
      speaker text NOT NULL,
      PRIMARY KEY (deliverable_id, position),
      UNIQUE (deliverable_id, part_id),
      UNIQUE (deliverable_id, speaker),
      FOREIGN KEY (deliverable_id, organisation_id) REFERENCES deliverables (id, organisation_id),
      FOREIGN KEY (part_id, organisation_id) REFERENCES deliverables (id, organisation_id)
    );
    CREATE INDEX deliverable_parts_part_idx ON deliverable_parts (part_id);
    CREATE TRIGGER deliverable_parts_immutable BEFORE UPDATE OR DELETE ON deliverable_parts
      FOR EACH ROW EXECUTE FUNCTION refuse_change();
    GRANT SELECT, INSERT ON deliverable_parts TO plimsoll_app;
  `);
}

export async function down(knex: Knex): Promise<void> {
  await knex.raw('DROP TABLE deliverable_parts');
}
