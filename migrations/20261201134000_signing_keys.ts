import type { Knex } from 'knex';

// The public halves of every key that ever signed a tag: whoever runs a second server, rotates a key or loses its file still verifies.
export async function up(knex: Knex): Promise<void> {
  await knex.raw(`
    create table signing_keys (
      -- The thumbprint of the public key (RFC 7638), as it stands in the header of each tag.
      kid text primary key,
      -- The member x of its JWK (RFC 8037): 32 bytes in base64url.
      x text not null,
      state text not null check (state in ('active', 'retired', 'compromised')),
      created_at timestamptz not null,
      ended_at timestamptz,
      reason text,
      check ((state = 'active') = (ended_at is null)),
      check (state <> 'compromised' or reason is not null)
    );
  `);
}

export async function down(knex: Knex): Promise<void> {
  await knex.raw('drop table signing_keys;');
}
