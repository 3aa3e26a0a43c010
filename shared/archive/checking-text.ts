/** `CHECKING.txt`, which lies in every archive: the same words in each, so that it needs nothing of the draw. */
export const CHECKING_TEXT = `How to check this draw

These files are everything that is needed to check, without trusting the site, that the prizes went where the coins sent
them. Do not take it from us, and do not take it from a program that came with us either: the format is public, and
whoever wants to can write a check of their own.


1. With Node

Install Node 20 or later from a place that you trust. Unpack this archive, open a terminal in its folder, and type:

    node check.mjs

or, from anywhere, "node check.mjs proof.zip". Add the fingerprint of the site's key, all 64 digits, as you find it on
the site's pages, on a poster or on a ticket:

    node check.mjs --key FINGERPRINT

Without it the check can only say "signed by an unknown key". If you have a receipt, check that you are in the list:

    node check.mjs . my-receipt.json

Whether the seal is older than the draw is shown only by somebody whom you trust: give the certificate of the timestamp
authority, or the key of a witness of the site's log, and get both from them and not from the site:

    node check.mjs --tsa authority.pem --witness NAME+ID+KEY

The program prints twelve steps and stops at the first that fails. It is one file that people can read. It opens no
connection and writes no file.


2. Without our program

Any Linux or macOS machine, with sha256sum and OpenSSL 3:

    sha256sum -c SHA256SUMS
    openssl pkeyutl -verify -pubin -inkey site-key.pem -rawin -in seal.json -sigfile seal.sig
    openssl pkeyutl -verify -pubin -inkey site-key.pem -rawin -in result.json -sigfile result.sig
    openssl pkey -pubin -in site-key.pem -outform DER | sha256sum
    sha256sum seal.json
    sha256sum terms.txt transcript.jsonl
    openssl ts -verify -data seal.json -in seal.tsr -CAfile authority.pem

The first line says whether a file was damaged. The next two say whether seal and result were signed with this key. The
fourth gives the key's fingerprint: compare all 64 digits with the ones that the site publishes, and with "key" in
seal.json. The fifth gives the digest of the seal, which receipts and the result name as "seal". The last two digests
stand in seal.json as "terms" and in result.json as "transcript". The last line verifies the timestamp of the seal, with the
authority's certificate from a place that you trust; "openssl ts -reply -in seal.tsr -text" prints its time.

That the picks follow from the seal and its sources is more arithmetic than a terminal is good for: for that, use a check.


3. What the files are

    seal.json         what was fixed before the draw: prizes, terms, the list's root, where the flips come from
    seal.sig          the site's signature over it (Ed25519, 64 bytes)
    terms.txt         the terms as they were published
    entries.csv       one line for each entrant: how many tickets, and a commitment that hides who it is
    result.json       what was opened at the draw, and every pick
    result.sig        the site's signature over it
    transcript.jsonl  every coin of every pick: the tickets on its two sides, its flips, how it fell
    labels.jsonl      the words that announce each winner; a winner may ask to have theirs taken out
    site-key.pem      the site's public key
    checkpoint.txt    the head of the site's log when this archive was made, signed: its size and its root
    log-proof.json    what the log says of this draw, each entry with its path to that root
    seal.tsr          a timestamp over seal.json by an outside authority (RFC 3161)
    witnessed.txt, witnessed-proof.json
                      the log from before the draw as outside witnesses cosigned it, and the path of this seal in it
    replaced.json, replaced-1.json, replaced-1.sig, replaced-1.tsr, and so on
                      the seals that this one replaced, and how many entrants were added, removed and changed after each
    SHA256SUMS        digests of all the other files, against damage
    check.mjs         the check
    bls12-381.mjs     a published library that it needs for the beacon's signature

Older archives lack some of the files about the log and the time, and a draw whose seal was never replaced has none of the last.


4. What no check can show

That every ticket sold was entered, and that nobody was invented. Receipts, a witness's sample of the stubs and the money
show that.

That a coin in the hall was tossed as it is written down. Those who stood there know.

That the beacon's members and the site, all together, did not choose the outcome. A hall that fears this tosses coins of
its own as well.

That the seal is older than the draw, unless somebody other than the site has put a time on it: a timestamp, or a
checkpoint of the site's log cosigned by others. Or you yourself: if you wrote the seal's digest down before the draw,
compare it now, all 64 digits.
`
