"""Units: trade spellings in, one factor to SI out.

A unit text is first held against a strict little grammar of our own: an optional power of ten, then names with
one-digit exponents, then divisions by single names. pint is asked for the meaning of one bare name at a time and
never sees the text itself. Rotation, strain and plain ratio carry no physical dimension, so they are told apart by
their named units: ``mrad``, ``microstrain`` and ``%`` do not stand for one another. Mass where a force is wanted
(``kg``, ``t``, ``lb``) means its weight, and the caller is told so.
"""

import math
import re
import unicodedata
from collections import Counter
from collections.abc import Mapping
from dataclasses import dataclass
from difflib import get_close_matches
from functools import lru_cache
from typing import Any

import pint

__all__ = ["DESIGN_UNITS", "GRAVITY", "Scale", "UnitError", "display", "from_si", "scale_of", "to_si", "us_units"]

GRAVITY = 9.80665  # m/s2, the standard value that defines kgf and lbf

DESIGN_UNITS: Mapping[str, str] = {
    "length": "m",
    "depth": "mm",
    "EI": "kN m2",
    "E": "GPa",
    "I": "cm4",
    "GA": "kN",
    "force": "kN",
    "intensity": "kN/m",
    "moment": "kN m",
    "bearing stiffness": "kN/mm",
    "rotational stiffness": "kN m/rad",
    "deflection": "mm",
    "level": "m",
    "rotation": "mrad",
    "curvature": "1/km",
    "strain": "microstrain",
    "settlement": "mm",
    "camber": "mm",
    "temperature": "degC",
    "temperature difference": "K",
    "expansion": "1/K",
    "deflection per kelvin": "mm/K",
    "level per kelvin": "mm/K",
    "rotation per kelvin": "mrad/K",
    "curvature per kelvin": "1/km/K",
    "strain per kelvin": "microstrain/K",
    "deflection rate": "mm/h",
    "level rate": "mm/h",
    "rotation rate": "mrad/h",
    "curvature rate": "1/km/h",
    "strain rate": "microstrain/h",
    "percent": "%",
    "ratio": "1",
}

SPELLINGS: Mapping[str, str] = {
    "Nm": "N m",
    "kNm": "kN m",
    "MNm": "MN m",
    "Nmm": "N mm",
    "kNmm": "kN mm",
    "Ncm": "N cm",
    "kNcm": "kN cm",
    "kp": "kgf",
    "k": "kip",
    "kips": "kip",
    "lbs": "lb",
    "lbfs": "lbf",
    "plf": "lbf/ft",
    "pli": "lbf/inch",
    "klf": "kip/ft",
    "psf": "lbf/ft2",
    "ksf": "kip/ft2",
    "ins": "inch",
    "mil": "thou",
    "mils": "thou",
    "ue": "microstrain",
    "με": "microstrain",
    "μstrain": "microstrain",
    "%": "percent",
    "°": "degree",
    "degC": "K",
    "°C": "K",
    "degF": "rankine",
    "°F": "rankine",
}

US_FORCES: Mapping[str, str] = {"lb": "lbf", "lbs": "lbf", "lbf": "lbf", "kip": "kip", "kips": "kip", "k": "kip"}

HINTS: Mapping[str, str] = {
    "ton": "a ton may be t (1000 kg), short_ton (2000 lb) or long_ton (2240 lb): write which",
    "tons": "a ton may be t (1000 kg), short_ton (2000 lb) or long_ton (2240 lb): write which",
    "T": "write t for 1000 kg",
    "C": "write degC",
    "F": "write degF",
    "kn": "write kN",
    "KN": "write kN",
    "Kn": "write kN",
    "MM": "write mm",
    "CM": "write cm",
    "KG": "write kg",
    "Kg": "write kg",
    "LB": "write lb",
    "FT": "write ft",
    "IN": "write in",
    "psf": "a load on an area: multiply by the tributary width to get a load a length",
    "ksf": "a load on an area: multiply by the tributary width to get a load a length",
}

_KIND_HINTS: Mapping[str, str] = {
    "rotation": "rotation needs a named unit: mrad, rad, deg; 1 mm/m is 1 mrad",
    "strain": "strain needs its named unit: microstrain; 1 um/m is 1 microstrain",
    "rotational stiffness": "write it a radian: kN m/rad, kip-in/rad",
    "percent": "write % or 1",
}

_TEMPERATURES: Mapping[str, tuple[float, float]] = {  # degC = (value + shift) * factor
    "degC": (1.0, 0.0),
    "°C": (1.0, 0.0),
    "degF": (5.0 / 9.0, -32.0),
    "°F": (5.0 / 9.0, -32.0),
    "K": (1.0, -273.15),
}

_NAMED_TOO: Mapping[str, str] = {"expansion": "strain", "curvature": "radian"}
_NO_PREFIX = {"inch", "foot", "yard", "mile", "thou", "pound", "ounce", "kip", "force_pound", "percent", "grade"}
_LONGEST = 40
_NAME = r"[A-Za-z%°με_]+"
_FACTOR = rf"{_NAME}(?:\^?-?[1-9])?"
_GRAMMAR = re.compile(
    rf"(?:1|(?:10\^-?\d\d?|1[eE]-?\d\d?)(?:[ -]{_FACTOR})?|{_FACTOR})(?:[ -]{_FACTOR})*(?:/{_FACTOR})*"
)
_PIECES = re.compile(rf"(/?)({_NAME})(?:\^?(-?[1-9]))?")
_POWER = re.compile(r"(?:10\^|1[eE])(-?\d\d?)")
_SUPERSCRIPTS = re.compile(r"[⁻⁺]?[⁰¹²³⁴-⁹]+")


class UnitError(ValueError):
    """A unit text that is no unit (``known`` is False) or none of the wanted kind; ``hint`` says what would be."""

    def __init__(self, expected: str, hint: str | None = None, *, known: bool = False) -> None:
        self.expected = expected
        self.hint = hint
        self.known = known
        super().__init__(expected)


@dataclass(frozen=True, slots=True, kw_only=True)
class Scale:
    """SI value = (written value + shift) * factor; ``weight``: a mass was read as its weight."""

    factor: float
    shift: float = 0.0
    weight: bool = False


@dataclass(frozen=True, slots=True, kw_only=True)
class _Meaning:
    """Factor to SI base units, exponents of these, and the exponent of masses written out."""

    factor: float
    dims: frozenset[tuple[str, float]]
    masses: int = 0


def scale_of(kind: str, text: str) -> Scale:
    """How to bring numbers in the unit `text` to SI of `kind`; UnitError where it is no such unit."""
    if kind == "temperature":
        return _temperature(text)
    wanted, found = _meaning(DESIGN_UNITS[kind]), _meaning(text)
    if _agrees(kind, found, wanted):
        return Scale(factor=found.factor)
    weighed = _weight(found)
    if found.masses and _agrees(kind, weighed, wanted):
        return Scale(factor=weighed.factor, weight=True)
    raise UnitError(f"a unit of {kind} such as {DESIGN_UNITS[kind]}", _hint(kind, text), known=True)


def to_si(kind: str, unit: str, values: Any) -> Any:
    """Numbers (any shape) written in `unit`, in SI of `kind`."""
    scale = scale_of(kind, unit)
    return (values + scale.shift) * scale.factor


def from_si(kind: str, unit: str, values: Any) -> Any:
    """SI numbers of `kind` (any shape) in `unit`."""
    scale = scale_of(kind, unit)
    return values / scale.factor - scale.shift


def display(units: Mapping[str, str], kind: str, value: Any) -> tuple[Any, str]:
    """An SI value of `kind` in the book's own unit, with that unit's text."""
    unit = units.get(kind, DESIGN_UNITS[kind])
    return from_si(kind, unit, value), unit


def us_units(written: Mapping[str, str]) -> dict[str, str]:
    """Units for what a book in feet or inches and pounds or kips did not write itself; none for any other book."""
    force, length = US_FORCES.get(written.get("force", "")), written.get("length")
    if force is None or length not in ("in", "ft"):
        return {}
    small = dict.fromkeys(("deflection", "settlement", "camber", "depth"), "in")
    return small | {
        "EI": f"{force} {length}2",
        "GA": force,
        "moment": f"{force} {length}",
        "intensity": f"{force}/{length}",
        "curvature": f"mrad/{length}",
        "rotational stiffness": f"{force} {length}/rad",
        "bearing stiffness": f"{force}/in",
        "level": length,
        "deflection rate": "in/h",
        "level rate": "in/h",
        "deflection per kelvin": "in/degF",
        "level per kelvin": "in/degF",
    }


def _temperature(text: str) -> Scale:
    """A temperature (not a difference) to degC."""
    if text not in _TEMPERATURES:
        raise UnitError("a temperature unit: degC, degF or K", HINTS.get(text), known=text not in HINTS)
    factor, shift = _TEMPERATURES[text]
    return Scale(factor=factor, shift=shift)


def _agrees(kind: str, found: _Meaning, wanted: _Meaning) -> bool:
    """Same exponents; an expansion may also be a strain a degree, a curvature a rotation a length."""
    named = _NAMED_TOO.get(kind)
    return found.dims == wanted.dims or (named is not None and found.dims == wanted.dims | {(named, 1.0)})


def _weight(found: _Meaning) -> _Meaning:
    """The same unit with every mass replaced by its weight."""
    dims = Counter(dict(found.dims))
    dims.update({"meter": found.masses, "second": -2 * found.masses})
    return _Meaning(factor=found.factor * GRAVITY**found.masses, dims=_frozen(dims))


def _hint(kind: str, text: str) -> str | None:
    return HINTS.get(text) or _KIND_HINTS.get(kind)


def _frozen(dims: Mapping[str, float]) -> frozenset[tuple[str, float]]:
    return frozenset((name, float(power)) for name, power in dims.items() if power)


def _plain(text: str) -> str:
    """One spelling for exponents, products, spaces and the micro sign."""
    marked = _SUPERSCRIPTS.sub(lambda found: "^" + unicodedata.normalize("NFKC", found[0]), text)
    plain = unicodedata.normalize("NFKC", marked).replace("−", "-").replace("\u00b5", "μ")
    plain = re.sub(r"[·⋅∙•×*]", " ", plain.replace("**", "^")).replace("μm", "um").replace("μrad", "urad")
    plain = re.sub(r"(?<=[A-Za-z])\.", "", plain)
    plain = re.sub(r"\s*([/^-])\s*", r"\1", plain)
    return " ".join(plain.split())


@lru_cache(maxsize=1024)
def _meaning(text: str) -> _Meaning:
    """What a whole unit text means; UnitError where it is not one."""
    plain = _plain(text) if len(text) <= _LONGEST else ""
    if not _GRAMMAR.fullmatch(plain):
        raise UnitError("a unit such as kN m2, kip-in or N/mm2", "names, one-digit exponents, one name after each /")
    factor, dims, masses = _power_of_ten(plain), Counter[str](), 0
    for slash, name, exponent in _PIECES.findall(_POWER.sub("", plain, count=1)):
        power = int(exponent or 1) * (-1 if slash else 1)
        part = _named(name, power)
        factor *= part.factor
        masses += part.masses
        dims.update(dict(part.dims))
    return _Meaning(factor=factor, dims=_frozen(dims), masses=masses)


def _power_of_ten(plain: str) -> float:
    found = _POWER.match(plain)
    return 10.0 ** int(found[1]) if found else 1.0


def _named(name: str, power: int) -> _Meaning:
    """One name to a power; of a run-together name such as kNm2 the power belongs to the last part."""
    parts = SPELLINGS.get(name, name).split(" ")
    pieces = [_single(part) for part in parts]
    powers = [1 if power > 0 else -1] * (len(parts) - 1) + [power]
    dims = Counter[str]()
    for piece, exponent in zip(pieces, powers, strict=True):
        dims.update({base: p * exponent for base, p in piece.dims})
    return _Meaning(
        factor=math.prod(piece.factor**exponent for piece, exponent in zip(pieces, powers, strict=True)),
        dims=_frozen(dims),
        masses=sum(piece.masses * exponent for piece, exponent in zip(pieces, powers, strict=True)),
    )


def _single(name: str) -> _Meaning:
    """One name by pint, or a spelling that is a quotient of names."""
    if "/" in name:
        return _meaning(name)
    if name in HINTS or not _known(name):
        raise UnitError("a known unit", HINTS.get(name) or _nearest(name))
    if name == "strain":  # pint takes its own base unit for no unit, but knows its multiples
        return _Meaning(factor=1.0, dims=frozenset({("strain", 1.0)}))
    base = _registry().Quantity(1.0, _registry().UnitsContainer({name: 1})).to_base_units()
    dims = _frozen({str(unit): float(power) for unit, power in base.unit_items()})
    return _Meaning(factor=float(base.magnitude), dims=dims, masses=int(dims == {("kilogram", 1.0)}))


def _known(name: str) -> bool:
    """Whether pint knows the bare name; US units take no SI prefix, so kft is not a kilofoot."""
    found = _registry().parse_unit_name(name)
    return any(not prefix or unit not in _NO_PREFIX for prefix, unit, _ in found)


def _nearest(name: str) -> str | None:
    known = [*SPELLINGS, *(part for unit in DESIGN_UNITS.values() for part in re.findall(_NAME, unit))]
    close = get_close_matches(name, [*known, "in", "ft", "lb", "kip", "ksi", "psi", "mrad", "deg"], n=1)
    return f"did you mean {close[0]}?" if close else None


@lru_cache(maxsize=1)
def _registry() -> Any:
    """The units of pint, made at first need; strain is a named unit beside the radian."""
    registry: Any = pint.UnitRegistry(cache_folder=None)
    registry.define("strain = []")
    return registry
