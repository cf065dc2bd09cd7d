"""The sheet on which gaps are filled: values, where each comes from, and by which rule."""

from __future__ import annotations

import numpy as np
import pandas as pd

from screener.columns import inventory_attributes
from screener.records import Ledger, Origin

NUMERIC = ("quantity", "number", "count", "date")


class Gaps:
    """Values by attribute (SI, NaN or None where missing) with an origin code for each cell.

    Rules call `fill`; nothing else writes. A value read in the file is never
    replaced: `reject` marks one that another finding has ruled out.
    """

    def __init__(self, values: dict, origin: dict, rows: int, ledger: Ledger) -> None:
        self.rows = rows
        self.ledger = ledger
        self._values = {}
        self._origin = {}
        self.scatter: dict[str, np.ndarray] = {}
        self._codes: dict[str, np.ndarray] = {}
        for name, attribute in inventory_attributes().items():
            numeric = attribute.kind in NUMERIC
            if name in values:
                given = values[name]
                self._values[name] = np.array(given, dtype=float if numeric else object)
                self._origin[name] = np.array(origin[name], dtype=np.uint8)
            else:
                self._values[name] = np.full(rows, np.nan if numeric else None, dtype=float if numeric else object)
                self._origin[name] = np.full(rows, Origin.MISSING, dtype=np.uint8)

    def __getitem__(self, attribute: str) -> np.ndarray:
        return self._values[attribute]

    def origin(self, attribute: str) -> np.ndarray:
        return self._origin[attribute]

    @property
    def origins(self) -> dict[str, np.ndarray]:
        return self._origin

    @property
    def values(self) -> dict[str, np.ndarray]:
        return self._values

    def add(self, attribute: str, numeric: bool = True) -> None:
        """A working attribute that inventories don't have."""
        self._values[attribute] = np.full(self.rows, np.nan if numeric else None, dtype=float if numeric else object)
        self._origin[attribute] = np.full(self.rows, Origin.MISSING, dtype=np.uint8)

    def missing(self, attribute: str) -> np.ndarray:
        """True where the attribute has no value; its origin code says so, which is cheaper than looking at the values."""
        return self._origin[attribute] == Origin.MISSING

    def known(self, attribute: str) -> np.ndarray:
        return ~self.missing(attribute)

    def is_read(self, attribute: str) -> np.ndarray:
        """True where the file says it, directly or converted."""
        origin = self._origin[attribute]
        return (origin == Origin.READ) | (origin == Origin.CONVERTED)

    def reject(self, attribute: str, where: np.ndarray) -> None:
        """Take a value out of use; the caller notes the finding."""
        values = self._values[attribute]
        values[where] = np.nan if values.dtype == float else None
        self._origin[attribute][where] = Origin.MISSING

    def fill(
        self,
        attribute: str,
        values,
        *,
        rule: str,
        source: str,
        where: np.ndarray | None = None,
        origin: Origin = Origin.ASSUMED,
        scatter=0.0,
        low=np.nan,
        high=np.nan,
    ) -> np.ndarray:
        """Fill what is still missing, where the rule has a value; returns the mask filled."""
        target = self._values[attribute]
        given = np.broadcast_to(np.asarray(values, dtype=target.dtype), (self.rows,))
        mask = self.missing(attribute)
        if where is not None:
            mask &= where
        open_rows = np.flatnonzero(mask)
        if len(open_rows):
            offered = given[open_rows]
            absent = np.isnan(offered) if target.dtype == float else pd.isna(offered)
            mask[open_rows[absent]] = False
        if not mask.any():
            return mask
        target[mask] = given[mask]
        self._origin[attribute][mask] = origin

        def pick(a):
            a = np.asarray(a, dtype=float)
            return a[mask] if a.ndim else a

        self.ledger.assumption(
            attribute,
            mask,
            given[mask],
            rule=rule,
            source=source,
            origin=origin,
            scatter=pick(scatter),
            low=pick(low),
            high=pick(high),
        )
        if target.dtype == float:
            self.note_scatter(attribute, mask, pick(scatter))
        return mask

    def note_scatter(self, attribute: str, mask: np.ndarray, scatter) -> None:
        spread = self.scatter.setdefault(attribute, np.zeros(self.rows))
        spread[mask] = scatter

    def group_codes(self, by: str) -> np.ndarray:
        """Integer code of each row's group, -1 without one; names compared without case."""
        if by not in self._codes:
            self._codes[by] = pd.factorize(folded(self._values[by]))[0]
        return self._codes[by]

    def group_median(self, attribute: str, by: str) -> np.ndarray:
        """Median of the values read in the same group, per row; NaN where the group has none."""
        code = self.group_codes(by)
        known = self.is_read(attribute) & (code >= 0)
        if not known.any():
            return np.full(self.rows, np.nan)
        medians = pd.Series(self._values[attribute][known]).groupby(code[known]).median()
        table = np.full(code.max() + 2, np.nan)
        table[medians.index.to_numpy()] = medians.to_numpy()
        return table[code]

    def group_vote(self, attribute: str, keys: list, least: int, share: float) -> tuple[np.ndarray, np.ndarray]:
        """(the commonest value read among rows with equal keys, its share), where the vote is clear.

        keys: attribute names or arrays of numbers. Clear: at least `least` rows of
        the group have a value and `share` of them agree. None and NaN elsewhere.
        """
        group = np.zeros(self.rows, dtype=np.int64)
        for key in keys:
            code = self.group_codes(key) if isinstance(key, str) else pd.factorize(key)[0]
            group = pd.factorize(group * (code.max() + 2) + code + 1)[0]
        known = np.flatnonzero(self.is_read(attribute))
        winner = np.full(self.rows, None, dtype=object)
        agreement = np.full(self.rows, np.nan)
        if not len(known):
            return winner, agreement
        code, names = pd.factorize(self._values[attribute][known])
        counts = np.zeros((group.max() + 1, len(names)), dtype=np.int64)
        np.add.at(counts, (group[known], code), 1)
        total, best, top = counts.sum(axis=1), counts.argmax(axis=1), counts.max(axis=1)
        clear = (total >= max(least, 1)) & (top >= share * total)
        ok = clear[group]
        winner[ok] = np.asarray(names, dtype=object)[best[group[ok]]]
        agreement[ok] = (top / np.maximum(total, 1))[group[ok]]
        return winner, agreement


def among(values: np.ndarray, words) -> np.ndarray:
    """True where a text value is one of a few words."""
    found = np.zeros(len(values), dtype=bool)
    for word in words:
        found |= values == word
    return found


def folded(words) -> pd.Series:
    """Group names without case and outer spaces, so that "UPLAND" and "Upland" are one zone; numbers as they are."""
    series = pd.Series(words)
    if series.dtype.kind in "iufb":
        return series
    code, unique = pd.factorize(series)
    plain = np.array([*(u.strip().casefold() if isinstance(u, str) else u for u in unique), None], dtype=object)
    return pd.Series(plain[code], dtype=object)
