import { Head } from '#src/lib/head.tsx'
import { Link } from '#src/ui/link.tsx'
import { Part, Title } from '#src/ui/page.tsx'
import { ApiPart } from './api-part.tsx'
import { PiecesPart } from './pieces-part.tsx'

const LEAD = 'Where each public file lies, what it holds, and how to check a draw without trusting this site.'

const FILES: readonly (readonly [string, string])[] = [
  ['seal.json', 'From the seal on. The signed commitment: list, prizes, rule, hour and sources of chance.'],
  ['seal.sig', 'Its Ed25519 signature, 64 raw bytes.'],
  ['entries.csv', 'From the seal on. One line an entrant: tickets and a commitment. No names.'],
  ['terms.txt', 'The terms as published.'],
  ['site-key.pem', 'The public key. Compare its fingerprint with one that reached you another way.'],
  ['result.json', 'From the draw on. The opened secret, the beacon round, and each pick.'],
  ['result.sig', 'Its signature.'],
  ['transcript.jsonl', 'One line a pick: each coin with the tickets on both sides, its flips and its side.'],
  ['labels.jsonl', 'The words that announce the winners, with the salts that tie them to the list.'],
  ['proof.zip', 'All of these, and a check that runs on its own.'],
]

export function Component() {
  return (
    <>
      <Head title="For developers" description={LEAD} path="/developers" />
      <Title title="For developers" lead={LEAD} />
      <Part title="Public files" note={<p>Under a draw’s address</p>}>
        <ul className="figures files">
          {FILES.map(([name, what]) => (
            <li key={name}>
              <code>…/{name}</code>
              <span>{what}</span>
            </li>
          ))}
        </ul>
        <p className="measure mt-unit">
          So the seal of a draw lies at <code>/draws/its-name/seal.json</code>.
        </p>
      </Part>
      <ApiPart />
      <PiecesPart />
      <Part title="Check by command">
        <p className="measure">
          The archive brings its own check: one readable file for plain Node, and the library for the beacon’s signature
          beside it. It works through the whole record in order and names the first thing that fails.
        </p>
        <code className="command" tabIndex={0}>
          {'unzip proof.zip -d proof\nnode proof/check.mjs --key FINGERPRINT proof.zip'}
        </code>
        <p className="measure mt-unit">
          A check that came with the archive, and a key that came with it, prove nothing alone: read the check first, or
          write your own, and take the fingerprint from a poster, a ticket or the draw’s page. With OpenSSL:
        </p>
        <code className="command" tabIndex={0}>
          {'openssl pkeyutl -verify -pubin -inkey site-key.pem \\\n  -rawin -in seal.json -sigfile seal.sig'}
        </code>
      </Part>
      <Part title="The record, in short" note={<p>evenpenny/1</p>}>
        <div className="measure">
          <p>
            <b>The list</b> is a Merkle tree in the shape of RFC 9162 whose nodes also carry ticket counts. Both
            children’s counts are hashed, never just their sum, so that no count can hide behind another. A leaf shows a
            ticket count and a commitment; name and label are behind two salts of their own, so that a winner’s label
            can be opened while everything else about them stays closed.
          </p>
          <p>
            <b>The seal</b> is canonical JSON (RFC 8785), hashed with SHA-256 and signed with Ed25519. It names the
            root, the prizes, the rule, the hour, a commitment to a secret seed, and the number of a beacon round after
            that hour.
          </p>
          <p>
            <b>The flips</b>: seed and round go through HKDF-SHA-256 with the seal’s digest as salt, which gives the
            draw key; the bits of HMAC-SHA-256 under it, numbered by pick and block, are the flips.
          </p>
          <p>
            <b>A coin</b> with chance a/b compares flips with the binary digits of a/b; the first difference decides. No
            number is ever rounded. <b>A walk</b> tosses such a coin at each node from the root, with the tickets still
            in on both sides, down to one leaf.
          </p>
        </div>
        <p className="measure mt-unit">
          <Link to="/how-it-works">The same with a small example</Link>
        </p>
      </Part>
    </>
  )
}
