"""One door to all texts of the sheets. A translation is another table with the same keys.

Depends on: drawing.texts_english.
"""

from __future__ import annotations

import re

from fabgen.drawing.texts_english import ENGLISH
from fabgen.errors import FabgenError


def say(key: str, **values: object) -> str:
    """The text of ``key`` with its values set in. Raises FabgenError for a key that the table lacks."""
    try:
        return ENGLISH[key].format(**values)
    except KeyError as error:
        raise FabgenError(f"The table of texts has no {error} for {key!r}; add it to texts_english.py.") from error


def size_name(key: str) -> str:
    """The words for a size's key; the key itself in plain words when the table has none."""
    return ENGLISH.get(f"size.{key}") or re.sub(r"_(mm|deg|mhz|ohm|pf|db)$", "", key).replace("_", " ")


def has(key: str) -> bool:
    """True when the table has a text for the key."""
    return key in ENGLISH
