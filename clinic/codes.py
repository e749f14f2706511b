"""Patient codes: random, never derived from anything, with two check characters.

The check is ISO/IEC 7064:2003 MOD 1271-36. Bodies are drawn without I, L, O and U and drawn again
until the check characters avoid them too, so that I, L and O can be read as 1, 1 and 0 on entry.
"""

import secrets

from trends.measures.check_characters import ALPHABET, check_characters, fits

LOOK_ALIKES = "ILOU"
BODY_ALPHABET = "".join(letter for letter in ALPHABET if letter not in LOOK_ALIKES)
BODY_LENGTH = 8
LENGTH = BODY_LENGTH + 2
READ_AS = str.maketrans({"I": "1", "L": "1", "O": "0", " ": None, "-": None, "\u00a0": None})


class CodeMistyped(ValueError):
    """A typed code whose length, letters or check characters don't fit."""

    def __init__(self, typed: str, why: str) -> None:
        self.typed = typed[:20]
        self.why = why
        super().__init__(
            f"The code {self.typed!r} is not a patient code: {why}. A code has {LENGTH} letters "
            "and digits, the last two check the others. Compare it with the card and type it again."
        )


def fresh() -> str:
    """Return a new random code; the caller makes sure it isn't taken."""
    while True:
        body = "".join(secrets.choice(BODY_ALPHABET) for _ in range(BODY_LENGTH))
        check = check_characters(body)
        if not set(check) & set(LOOK_ALIKES):
            return body + check


def normalise(typed: str) -> str:
    """Return a typed code in its stored form; raise ``CodeMistyped`` before any look-up."""
    code = typed.strip().upper().translate(READ_AS)
    if len(code) != LENGTH:
        raise CodeMistyped(typed, f"it has {len(code)} characters instead of {LENGTH}")
    if not all(letter in ALPHABET for letter in code):
        raise CodeMistyped(typed, "it has a character that is no letter or digit")
    if not fits(code):
        raise CodeMistyped(typed, "its check characters do not fit the others")
    return code
