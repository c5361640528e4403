import type { Knex } from 'knex'

/** Keys of entries are a ticket's own, so that nobody else's key can swallow an entry; and when a proof became final. */
export async function up(db: Knex): Promise<void> {
  await db.raw(`
    drop index ticket_events_idempotency;
    create unique index ticket_events_idempotency on ticket_events (ticket_id, idempotency_key) where idempotency_key is not null;
    drop index ticket_files_idempotency;
    create unique index ticket_files_idempotency on ticket_files (ticket_id, idempotency_key) where idempotency_key is not null;
    alter table tickets add column proof_final_at timestamptz;
    create index tickets_follow_up on tickets (follow_up_of) where follow_up_of is not null;
  `)
}
