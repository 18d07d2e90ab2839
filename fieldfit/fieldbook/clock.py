"""Clock: dates and times as seconds that can be compared, and what keeps them from being compared."""

from collections.abc import Mapping

import numpy as np
import numpy.typing as npt
import pandas as pd

from fieldfit.fieldbook.cells import Floats, full_times

__all__ = ["FORMS", "TIMES", "comparable", "forms_of", "moments"]

#: Columns of times that are compared.
TIMES = (("stages", "start"), ("stages", "end"), ("readings", "time"), ("resets", "time"))

#: How a time may be written, and what it is called in words.
FORMS: Mapping[str, str] = {
    "local": "a date with a time of day",
    "zoned": "a date with a time of day and its offset from UTC",
    "day": "a date alone",
    "hour": "a time of day alone",
}
_ZONED = r"T.*(?:Z|[+-]\d\d:?\d\d)$"
Words = npt.NDArray[np.object_]


def moments(texts: Words) -> Floats:
    """Seconds of times in ISO 8601 (n,), NaN where blank; with an offset since 1970 in UTC, else by their own clock.

    A time of day alone counts from midnight.
    """
    plain = full_times(texts)
    if plain is not None:
        return plain.astype(np.int64).astype(np.float64)
    codes, distinct = pd.factorize(texts)
    full = ["1970-01-01T" + text if text[2:3] == ":" else text for text in distinct]
    parsed = pd.to_datetime(pd.Series(full, dtype=object), format="ISO8601", utc=True)
    seconds = parsed.to_numpy(dtype="datetime64[ns]").astype(np.int64) / 1e9
    return np.append(seconds, np.nan)[codes]


def forms_of(texts: Words) -> Words:
    """How each time is written, one of ``FORMS``, None where blank."""
    if full_times(texts) is not None:
        return np.full(len(texts), "local", dtype=object)
    codes, distinct = pd.factorize(texts)
    words = pd.Series(distinct, dtype=object)
    zoned = words.astype(str).str.contains(_ZONED, regex=True).to_numpy(dtype=bool)
    length = words.astype(str).str.len().to_numpy()
    hour = words.astype(str).str[2:3].to_numpy() == ":"
    forms = np.select([hour, length == len("2024-05-14"), zoned], ["hour", "day", "zoned"], "local").astype(object)
    return np.append(forms, np.array([None], dtype=object))[codes]


def comparable(tables: Mapping[str, pd.DataFrame]) -> bool:
    """Whether all times of a book are written in one way."""
    distinct = [np.array([*tables[table][name].dropna().unique()], dtype=object) for table, name in TIMES]
    return len({form for texts in distinct if len(texts) for form in forms_of(texts)}) <= 1
