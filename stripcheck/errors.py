"""The one exception that stands for bad input, and the form in which a user's own words are shown."""

from __future__ import annotations

import re

LONGEST = 1_000  # [characters] of a sentence: whatever a file holds, what is said about it stays readable
_START = 700
# control characters, halves of characters, line ends of Unicode, and marks that turn the direction of what follows:
# none of them belongs into one sentence, and a terminal may obey them
_NOT_SHOWN = re.compile("[\x00-\x1f\x7f-\x9f\u2028-\u202e\u2066-\u2069\ud800-\udfff]")


class InputError(Exception):
    """Bad input, said in one clear sentence: where, what, and what would be right.

    The command line prints the sentence and exits with code 2; nothing is written. The sentence is kept to one line of
    at most 1,000 characters, since it may quote a file from anywhere.

    >>> print(InputError("strips.csv: a\\nb" + 2_000 * "x" + ": a number is expected"))
    strips.csv: a bxx...xx ... xx...xx: a number is expected
    """

    def __init__(self, sentence: str) -> None:
        super().__init__(one_line(sentence))


def one_line(text: str) -> str:
    """A text as it may be shown: on one line, without control characters, and with its middle left out where it is long.

    >>> one_line("Strip" + chr(27) + "[31m")
    'Strip [31m'
    """
    text = _NOT_SHOWN.sub(" ", text)
    return text if len(text) <= LONGEST else f"{text[:_START]} ... {text[5 + _START - LONGEST:]}"
