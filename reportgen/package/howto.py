"""The text that tells a reader how to check a package without this program."""

from __future__ import annotations

from reportgen.package.identity import SELF_ISSUED

HOW_TO_FILE = "HOW-TO-CHECK.txt"

_TEXT = """\
HOW TO CHECK THIS PACKAGE
Document {number}, revision {revision}

Nothing here needs the program that made the package. The commands are those of
GNU coreutils (sha512sum), OpenSSL 3 (openssl) and Poppler (pdfsig). Type them in
the package's folder, the one that holds bagit.txt. Each must succeed.

1. EVERY FILE IS THE ONE THAT WAS PACKED

     sha512sum --strict -c tagmanifest-sha512.txt
     sha512sum --strict -c manifest-sha512.txt

   Both must print OK on every line. Then see that nothing was added: this must
   print exactly the same number twice.

     find data -type f | wc -l
     wc -l < manifest-sha512.txt

   At the top there may be only: bag-info.txt, bagit.txt, data,
   manifest-sha512.txt, signatures, tagmanifest-sha512.txt.

2. WHO SIGNED

   Each sign-off is a folder: signatures/prepared, signatures/checked,
   signatures/approved, in this order, as far as the document went. Go through steps
   2 to 5 for each. Take the certificate out and look at it:

     S=signatures/prepared
     openssl pkcs7 -inform DER -in $S/tagmanifest-sha512.txt.p7s \\
       -print_certs -out ../signer.pem
     openssl x509 -in ../signer.pem -noout -subject -issuer -dates -fingerprint -sha256

   If subject and issuer are the same and say "{self_issued}",
   nobody but the signer vouches for the name: ask the signer, by telephone or in
   person, for the fingerprint and compare all of it. Otherwise get the issuer's root
   certificate from the issuer, and give its file in step 3 after -CAfile.

3. THE SIGNATURE FITS THE FILES

     openssl cms -verify -binary -inform DER -in $S/tagmanifest-sha512.txt.p7s \\
       -content tagmanifest-sha512.txt -CAfile ../signer.pem -purpose any -out /dev/null

   It must print "CMS Verification successful". If the certificate has expired since,
   judge it at the time of signing, which the statement gives:

     T=$(grep '"time"' $S/statement.json | cut -d '"' -f 4)
     openssl cms -verify -binary -inform DER -in $S/tagmanifest-sha512.txt.p7s \\
       -content tagmanifest-sha512.txt -CAfile ../signer.pem -purpose any -out /dev/null \\
       -attime $(date -u -d $T +%s)

4. WHAT THE SIGNER STATED

     cat $S/statement.json
     sha512sum $S/statement.json
     openssl cms -cmsout -print -inform DER -in $S/tagmanifest-sha512.txt.p7s | \\
       grep "statement.json SHA-512"

   The digest that sha512sum prints must be the one in the signature.

5. THE SIGNED PDF

   data/report.pdf is the report as it was made. Each sign-off holds a copy with its
   own signature appended; the last sign-off's copy holds them all.

     pdfsig -nocert $S/report.pdf

   Read its words, not its exit status: every signature must say "Signature is Valid",
   and the last must say "Total document signed". That the copy begins with the report
   as it was made:

     cmp -n $(wc -c < data/report.pdf) data/report.pdf $S/report.pdf

6. WHAT A SIGNATURE DOES NOT SAY

   It says that nothing was changed since, and with whose key it was signed. It does
   not say that the calculation is right. The verdicts in the report are against the
   limits that it states, and no more.
"""


def how_to_check(number: str, revision: str) -> str:
    """Give the text of ``HOW-TO-CHECK.txt``.

    Parameters
    ----------
    number, revision
        The document's.
    """
    return _TEXT.format(number=number, revision=revision, self_issued=SELF_ISSUED)
