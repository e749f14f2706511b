"""ETDRS scores made from a chart test or from a 100-based score."""

from trends.measures.acuity import refuse


def letters_from_test(letters_at_4m: int, letters_at_1m: int | None = None) -> int:
    """Return the ETDRS score of a chart test: N4 + 30 if N4 is 20 or more, else N4 + N1.

    From memory, check the original (ETDRS chart protocol). Raises ``AcuityRefused``.
    """
    if not 0 <= letters_at_4m <= 70:
        raise refuse("etdrs_letters", str(letters_at_4m), "0 to 70 at 4 m", "14 lines of 5.")
    if letters_at_4m >= 20:
        return letters_at_4m + 30
    if letters_at_1m is None or not 0 <= letters_at_1m <= 30:
        raise refuse(
            "etdrs_letters", str(letters_at_1m), "0 to 30 at 1 m", "Below 20 letters 1 m is tested."
        )
    return letters_at_4m + letters_at_1m


def letters_from_100_based(score: int) -> int:
    """Return ETDRS letters of a 100-based score (100 at 20/20), which must be declared as such.

    DICOM PS3.17 RR.2.2: 100 - 50 logMAR. Raises ``AcuityRefused`` outside 15 to 115.
    """
    if not 15 <= score <= 115:
        raise refuse(
            "100-based score",
            str(score),
            "15 to 115",
            "15 is 0 letters, 100 is 20/20, 115 is 20/10.",
        )
    return score - 15
