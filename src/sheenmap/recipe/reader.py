"""Walks a TOML table and collects every fault on the way; nothing here knows what a key is for."""

import math
import re
from collections.abc import Callable, Iterable, Sequence
from typing import Any, TypeVar

from sheenmap.errors import CurveError, Fault, SheenmapError, UnknownNameError, nearest_name

T = TypeVar("T")
LONGEST_SHOWN = 80
BARE_KEY = re.compile(r"[A-Za-z0-9_-]+")


class Reader:
    """One table of a recipe: its values, its full name, and the list that all faults go to.

    Each getter marks its key as known, returns the checked value, and on a fault notes it and returns the default.
    ``finish`` reports the keys that nobody asked for.
    """

    def __init__(self, table: dict[str, Any], path: str, faults: list[Fault]) -> None:
        self.table, self.path, self.faults = table, path, faults
        self._known: list[str] = []
        self._refused: list[str] = []

    def name(self, key: str) -> str:
        """The full name of a key, quoted where TOML wants it quoted."""
        plain = key if BARE_KEY.fullmatch(key) else shown(key)
        return f"{self.path}.{plain}" if self.path else plain

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
        low: float,
        high: float,
        open_low: bool = False,
        open_high: bool = False,
    ) -> float | T:
        """A finite number within limits."""
        value = self.raw(key)
        if value is None:
            return default
        allowed = _range_text(low, high, open_low=open_low, open_high=open_high)
        number = as_number(value)
        if number is None:
            self.fault(key, f"found {shown(value)}", allowed)
            return default
        if number < low or number > high or (open_low and number == low) or (open_high and number == high):
            self.fault(key, f"found {number:g}", allowed)
            return default
        return number

    def numbers(self, key: str, count: int) -> tuple[float, ...] | None:
        """A list of ``count`` finite numbers, or None."""
        value = self.raw(key)
        if value is None:
            return None
        numbers = [as_number(item) for item in value] if isinstance(value, list) else []
        known = tuple(number for number in numbers if number is not None)
        if len(numbers) != count or len(known) != count:
            self.fault(key, f"found {shown(value)}", f"a list of {count} numbers")
            return None
        return known

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
            hint = did_you_mean(value, allowed) if isinstance(value, str) else ""
            self.fault(key, f"found {shown(value)}", ", ".join(allowed), hint)
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

    def attempt(self, key: str, make: Callable[[], T], *, found: str, allowed: str = "") -> T | None:
        """What ``make`` returns; its complaint becomes a fault of ``key``. ``allowed`` is said of names that do not exist."""
        try:
            return make()
        except UnknownNameError as fault:
            hint = f"did you mean {fault.nearest}?" if fault.nearest else ""
            self.fault(key, f"found {found}", getattr(fault, "allowed", allowed), hint)
        except CurveError as fault:
            what, _, wanted = str(fault).partition("; allowed: ")
            self.fault(key, f"found {found}: {what}", wanted)
        except SheenmapError as fault:
            self.fault(key, f"found {found}: {fault}")
        return None

    def require(self, key: str, allowed: str) -> bool:
        """Whether the key is there; a fault when it is not."""
        if key not in self.table:
            self.fault(key, "nothing", allowed)
        return key in self.table

    def not_supported(self, keys: Iterable[str]) -> None:
        """Refuse keys that have a meaning which this release cannot give them."""
        for key in keys:
            self._refused.append(key)
            if key in self.table:
                self.fault(key, "not supported yet")

    def finish(self) -> None:
        """Report every key that nobody asked for, with the nearest one that is known.

        A key that is missing because it is misspelt is one fault, not two.
        """
        known = list(dict.fromkeys(self._known))
        for key in self.table:
            if key not in known and key not in self._refused:
                self.fault(key, "unknown key", ", ".join(known), did_you_mean(key, known))
                missing = self.name(nearest_name(key, [name for name in known if name not in self.table]))
                self.faults[:] = [fault for fault in self.faults if (fault.key, fault.found) != (missing, "nothing")]


def did_you_mean(name: str, known: Iterable[str]) -> str:
    """The hint that names the nearest right one, or nothing."""
    near = nearest_name(name, known)
    return f"did you mean {near}?" if near else ""


def as_number(value: Any) -> float | None:
    """A TOML value as a finite number, or None when it is none (whole numbers may be too large for one)."""
    if isinstance(value, bool) or not isinstance(value, int | float):
        return None
    try:
        number = float(value)
    except OverflowError:
        return None
    return number if math.isfinite(number) else None


def shown(value: Any) -> str:
    """A value as a fault shows it: shortened, on one line, without control characters."""
    try:
        text = f'"{value}"' if isinstance(value, str) else str(value).lower() if isinstance(value, bool) else str(value)
    except ValueError:  # Python refuses to print whole numbers of thousands of digits
        return "a number far too large"
    plain = "".join(char if char.isprintable() else char.encode("unicode_escape").decode() for char in text)
    return plain if len(plain) <= LONGEST_SHOWN else plain[: LONGEST_SHOWN - 3] + "..."


def _range_text(low: float, high: float, *, open_low: bool, open_high: bool) -> str:
    start = f"above {low:.10g}" if open_low else f"{low:.10g}"
    return f"{start} up to, not including, {high:.10g}" if open_high else f"{start} to {high:.10g}"
