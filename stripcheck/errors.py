"""The one exception that stands for bad input."""


class InputError(Exception):
    """Bad input, said in one clear sentence: where, what, and what would be right.

    The command line prints the sentence and exits with code 2; nothing is written.
    """
