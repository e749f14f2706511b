"""Two check characters of a code: ISO/IEC 7064:2003 MOD 1271-36.

Every single mistyped character and every swap of two neighbours changes the remainder.
"""

ALPHABET = "0123456789ABCDEFGHIJKLMNOPQRSTUVWXYZ"
MODULUS = 1271
RADIX = len(ALPHABET)


def remainder(body: str) -> int:
    """Return a body's value modulo 1271, two places further left, as a number to base 36."""
    total = 0
    for letter in body + "00":
        total = (total * RADIX + ALPHABET.index(letter)) % MODULUS
    return total


def check_characters(body: str) -> str:
    """Return the two check characters of a body of digits and capital letters."""
    return "".join(ALPHABET[place] for place in divmod((1 - remainder(body)) % MODULUS, RADIX))


def fits(code: str) -> bool:
    """Say whether a whole code's check characters fit (its value is 1 modulo 1271)."""
    return all(letter in ALPHABET for letter in code) and int(code, RADIX) % MODULUS == 1
