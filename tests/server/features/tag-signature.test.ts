import { createPrivateKey, sign } from 'node:crypto';
import { existsSync, mkdtempSync, readFileSync, rmSync, statSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { CompactSign, compactVerify, decodeProtectedHeader } from 'jose';
import { afterEach, beforeEach, describe, expect, test } from 'vitest';
import type { TagContent } from '../../../shared/api/tags.js';
import { canonicalJson } from '../../../server/canonical-json.js';
import { loadSigningKey, signingKeyOf } from '../../../server/features/tags/signing-key.js';
import { sameText, signaturePart, signTag, verifiedContent } from '../../../server/features/tags/tag-signature.js';
import { SetUpError } from '../../../server/set-up-error.js';

/** RFC 8410, section 7: the frame around the 32 bytes of an Ed25519 secret key in PKCS #8. */
const PKCS8_FRAME = '302e020100300506032b657004220420';
const keyOf = (secretHex: string) =>
  signingKeyOf(createPrivateKey({ key: Buffer.from(PKCS8_FRAME + secretHex, 'hex'), format: 'der', type: 'pkcs8' }));

// RFC 8032, section 7.1, tests 1 to 3.
const vectors = [
  {
    secret: '9d61b19deffd5a60ba844af492ec2cc44449c5697b326919703bac031cae7f60',
    publicKey: 'd75a980182b10ab7d54bfed3c964073a0ee172f3daa62325af021a68f707511a',
    message: '',
    signature:
      'e5564300c360ac729086e2cc806e828a84877f1eb8e5d974d873e065224901555fb8821590a33bacc61e39701cf9b46bd25bf5f0595bbe24655141438e7a100b',
  },
  {
    secret: '4ccd089b28ff96da9db6c346ec114e0f5b8a319f35aba624da8cf6ed4fb8a6fb',
    publicKey: '3d4017c3e843895a92b70aa74d1b7ebc9c982ccf2ec4968cc0cd55f12af4660c',
    message: '72',
    signature:
      '92a009a9f0d4cab8720e820b5f642540a2b27b5416503f8fb3762223ebdb69da085ac1e43e15996e458f3613d0f11d8c387b2eaeb4302aeeb00d291612bb0c00',
  },
  {
    secret: 'c5aa8df43f9f837bedb7442f31dcb7b166d38535076f094b85ce3a2e0b4458f7',
    publicKey: 'fc51cd8e6218a1a38da47ed00230f0580816ed13ba3303ac5deb911548908025',
    message: 'af82',
    signature:
      '6291d657deec24024827e69c3abe01a30ce548a284743a445e3680d7db5ac3ac18ff9b538d16f290ae67f760984dc6594a7c15e9716ed28dc027beceea1ec40a',
  },
];

const content: TagContent = {
  tag: '0412-2',
  lookUpWord: '7QKF',
  sample: false,
  appliance: 'washing machine',
  plate: { maker: 'Brindle', model: 'BW 714', serial: '7143 0968 2251', plateUnreadable: false, protectionClass: 'I' },
  tested: [{ title: 'Drain pump winding', reading: '157.7 Ω', spread: '±1.3', limit: '140 to 180 Ω', verdict: 'pass' }],
  mended: [],
  signedOffAt: '2026-03-05T15:10:00.000Z',
  signedOffBy: 'Maren',
  fourEyes: true,
  warrantyMonths: 12,
  cautions: [],
  shop: { name: 'Millrace Mend', address: '12 Dyehouse Yard', phone: '01632 960412' },
};

describe('The signing key', () => {
  let folder: string;
  beforeEach(() => {
    folder = mkdtempSync(join(tmpdir(), 'refettle-key-'));
  });
  afterEach(() => {
    rmSync(folder, { recursive: true, force: true });
  });

  test.each(vectors)(
    'When the secret key is $secret, then public key and signature are those of RFC 8032',
    async ({ secret, publicKey, message, signature }) => {
      const key = await keyOf(secret);
      expect(Buffer.from(key.publicKey.export({ format: 'jwk' }).x ?? '', 'base64url').toString('hex')).toBe(publicKey);
      expect(sign(null, Buffer.from(message, 'hex'), key.privateKey).toString('hex')).toBe(signature);
    },
  );

  test('When it is named, then by its thumbprint, as RFC 8037 has it for the first of these keys', async () => {
    expect((await keyOf(vectors[0]?.secret ?? '')).kid).toBe('kPrK_qmxVWaYVA9wwBF6Iuo3vVzz7TxHCTwXBygrS4k'); // RFC 8037, A.3
  });

  test('When the server starts twice, then the key is the same, and nobody else on the machine can read it', async () => {
    const first = await loadSigningKey(folder);
    const path = join(folder, 'signing-key.pem');
    expect(existsSync(path)).toBe(true);
    expect(statSync(path).mode & 0o777).toBe(0o600);
    expect((await loadSigningKey(folder)).kid).toBe(first.kid);
    expect(readFileSync(path, 'utf8')).toContain('BEGIN PRIVATE KEY');
  });

  test('When the key file is broken, then the start says what to do and does not make another one', async () => {
    writeFileSync(join(folder, 'signing-key.pem'), 'not a key');
    await expect(loadSigningKey(folder)).rejects.toThrow(SetUpError);
    expect(readFileSync(join(folder, 'signing-key.pem'), 'utf8')).toBe('not a key');
  });
});

describe('A signed tag', () => {
  test('When our key signs the example of RFC 8037, then the JWS is the one printed there', async () => {
    const key = await keyOf(vectors[0]?.secret ?? '');
    const jws = await new CompactSign(Buffer.from('Example of Ed25519 signing')).setProtectedHeader({ alg: 'EdDSA' }).sign(key.privateKey);
    // RFC 8037, A.4.
    const printed =
      'eyJhbGciOiJFZERTQSJ9.RXhhbXBsZSBvZiBFZDI1NTE5IHNpZ25pbmc.hgyY0il_MGCjP0JzlnLWG1PPOt7-09PGcvMg3AIbQR6dWbhijcNR4ki4iylGjg5BhVsPt9g7sVvpAr_MuM0KAg';
    expect(jws).toBe(printed);
    expect(Buffer.from((await compactVerify(printed, key.publicKey)).payload).toString()).toBe('Example of Ed25519 signing');
  });

  test('When it is verified, then its content comes back; the same content gives the same signature of 86 characters', async () => {
    const key = await keyOf(vectors[1]?.secret ?? '');
    const jws = await signTag(content, key);
    expect(decodeProtectedHeader(jws)).toEqual({ alg: 'EdDSA', kid: key.kid });
    expect(await verifiedContent(jws, key)).toEqual(content);
    expect(signaturePart(jws)).toMatch(/^[\w-]{86}$/); // 64 bytes in base64url (RFC 4648, 5)
    const turned = Object.fromEntries(Object.entries(content).reverse()) as unknown as TagContent;
    expect(await signTag(turned, key)).toBe(jws);
  });

  test('When anything of it is changed, or another key or algorithm is named, then it does not hold', async () => {
    const key = await keyOf(vectors[1]?.secret ?? '');
    const other = await keyOf(vectors[2]?.secret ?? '');
    const jws = await signTag(content, key);
    const [head = '', payload = '', signature = ''] = jws.split('.');
    const none = Buffer.from('{"alg":"none"}').toString('base64url');
    for (const forged of [
      [head, Buffer.from(canonicalJson({ ...content, warrantyMonths: 60 })).toString('base64url'), signature].join('.'),
      [head, payload, signature.replace(/^./, (letter) => (letter === 'A' ? 'B' : 'A'))].join('.'),
      [none, payload, ''].join('.'),
      [none, payload, signature].join('.'),
      payload,
      '',
    ]) {
      expect(await verifiedContent(forged, key)).toBeUndefined();
    }
    expect(await verifiedContent(jws, other)).toBeUndefined();
    expect(await verifiedContent(await signTag({ ...content, tested: 'nothing' } as unknown as TagContent, key), key)).toBeUndefined();
  });

  test('When texts are compared, then only the same text is the same', () => {
    expect(sameText('7QKF', '7QKF')).toBe(true);
    for (const text of ['7qkf', '7QK', '7QKFF', '', '7QKG']) expect(sameText(text, '7QKF')).toBe(false);
  });
});

test('When JSON is written down canonically, then the order of its members does not matter and that of its items does', () => {
  expect(canonicalJson({ b: [2, 1], a: { d: 'é', c: null } })).toBe('{"a":{"c":null,"d":"é"},"b":[2,1]}');
  expect(canonicalJson([1, 2])).not.toBe(canonicalJson([2, 1]));
});
