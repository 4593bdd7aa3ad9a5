"""Outside witness of `plan` and `forecast`: the published formulas of the engine, written a second time in another language.

One module a topic; `witness.py` beside this folder is the command.
"""


class Refusal(Exception):
    """The case cannot be computed; the text says why. The command ends with status 2."""
