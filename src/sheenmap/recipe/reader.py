"""Walks a TOML table and collects every fault on the way; nothing here knows what a key is for."""

import math
from collections.abc import Callable, Iterable, Sequence
from typing import Any, TypeVar

from sheenmap.errors import CurveError, Fault, UnknownNameError, nearest_name

T = TypeVar("T")
SHORTEST_TEXT = 80


class Reader:
    """One table of a recipe: its values, its full name, and the list that all faults go to.

    Each getter marks its key as known, returns the checked value, and on a fault notes it and returns the default.
    ``finish`` reports the keys that nobody asked for.
    """

    def __init__(self, table: dict[str, Any], path: str, faults: list[Fault]) -> None:
        self.table, self.path, self.faults = table, path, faults
        self._known: list[str] = []

    def name(self, key: str) -> str:
        """The full name of a key."""
        return f"{self.path}.{key}" if self.path else key

    def fault(self, key: str, found: str, allowed: str = "", hint: str = "") -> None:
        """Note a fault of ``key``."""
        self.faults.append(Fault(key=self.name(key), found=found, allowed=allowed, hint=hint))

    def raw(self, key: str) -> Any:
        """The value as it stands, or None."""
        self._known.append(key)
        return self.table.get(key)

    def number(
        self,
        key: str,
        default: T,
        *,
        low: float = -math.inf,
        high: float = math.inf,
        open_low: bool = False,
        open_high: bool = False,
    ) -> float | T:
        """A finite number within limits."""
        value = self.raw(key)
        if value is None:
            return default
        allowed = _range_text(low, high, open_low=open_low, open_high=open_high)
        if isinstance(value, bool) or not isinstance(value, int | float) or not math.isfinite(value):
            self.fault(key, f"found {shown(value)}", allowed)
            return default
        if value < low or value > high or (open_low and value == low) or (open_high and value == high):
            self.fault(key, f"found {value:g}", allowed)
            return default
        return float(value)

    def numbers(self, key: str, count: int) -> tuple[float, ...] | None:
        """A list of ``count`` finite numbers, or None."""
        value = self.raw(key)
        if value is None:
            return None
        if not isinstance(value, list) or len(value) != count or not all(is_number(item) for item in value):
            self.fault(key, f"found {shown(value)}", f"a list of {count} numbers")
            return None
        return tuple(float(item) for item in value)

    def text(self, key: str, default: T) -> str | T:
        """A text."""
        value = self.raw(key)
        if value is None:
            return default
        if not isinstance(value, str) or not value:
            self.fault(key, f"found {shown(value)}", "a text in quotes")
            return default
        return value

    def flag(self, key: str) -> bool:
        """True or false; false by default."""
        value = self.raw(key)
        if value is not None and not isinstance(value, bool):
            self.fault(key, f"found {shown(value)}", "true or false")
        return value is True

    def choice(self, key: str, allowed: Sequence[str], default: str) -> str:
        """One of a few words."""
        value = self.raw(key)
        if value is None:
            return default
        if value not in allowed:
            near = nearest_name(value, allowed) if isinstance(value, str) else ""
            self.fault(key, f"found {shown(value)}", ", ".join(allowed), f"did you mean {near}?" if near else "")
            return default
        return str(value)

    def table_of(self, key: str) -> "Reader | None":
        """A table within this one, or None."""
        value = self.raw(key)
        if value is None:
            return None
        if not isinstance(value, dict):
            self.fault(key, f"found {shown(value)}", "a table")
            return None
        return Reader(value, self.name(key), self.faults)

    def tables_of(self, key: str) -> list["Reader"]:
        """A list of tables."""
        value = self.raw(key)
        if value is None:
            return []
        if not isinstance(value, list) or not all(isinstance(item, dict) for item in value):
            self.fault(key, f"found {shown(value)}", "a list of tables")
            return []
        return [Reader(item, f"{self.name(key)}[{k}]", self.faults) for k, item in enumerate(value)]

    def attempt(self, key: str, make: Callable[[], T], *, found: str) -> T | None:
        """What ``make`` returns; its complaint becomes a fault of ``key``."""
        try:
            return make()
        except UnknownNameError as fault:
            self.fault(key, f"found {found}", str(fault))
        except CurveError as fault:
            self.fault(key, f"found {found}", str(fault))
        return None

    def not_supported(self, keys: Iterable[str]) -> None:
        """Refuse keys that the design knows and this release does not."""
        for key in keys:
            if self.raw(key) is not None:
                self.fault(key, f"found {shown(self.table[key])}", "not supported yet")

    def finish(self) -> None:
        """Report every key that nobody asked for, with the nearest one that is known."""
        for key in self.table:
            if key not in self._known:
                near = nearest_name(key, self._known)
                self.fault(key, "unknown key", ", ".join(dict.fromkeys(self._known)), f"did you mean {near}?" if near else "")


def is_number(value: Any) -> bool:
    """Whether a TOML value is a finite number."""
    return isinstance(value, int | float) and not isinstance(value, bool) and math.isfinite(value)


def shown(value: Any) -> str:
    """A value as a fault shows it, shortened."""
    text = f'"{value}"' if isinstance(value, str) else str(value)
    return text if len(text) <= SHORTEST_TEXT else text[: SHORTEST_TEXT - 3] + "..."


def _range_text(low: float, high: float, *, open_low: bool, open_high: bool) -> str:
    if math.isinf(low) and math.isinf(high):
        return "a number"
    if math.isinf(high):
        return f"a number above {low:g}" if open_low else f"{low:g} or more"
    start = f"above {low:g}" if open_low else f"{low:g}"
    return f"{start} up to, not including, {high:g}" if open_high else f"{start} to {high:g}"
