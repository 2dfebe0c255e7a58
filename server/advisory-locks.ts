/** The numbers of PostgreSQL's advisory locks, in one place: two that are the same wait for each other for ever. */
export const LOCK = {
  /** One program at a time brings the tables to their newest shape. */
  migrations: 727_274,
  /** Whoever tells what goes on holds it until its commit: then ids are in the order of commits. Triggers of a migration take it, too. */
  live: 727_275,
  /** Held by whoever works with the shop's database, against a restore. */
  work: 727_276,
} as const;
