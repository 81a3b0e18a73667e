"""Species names: atoms and ions in spectroscopic notation, molecules, diffuse bands."""

from __future__ import annotations

import re
from dataclasses import dataclass
from functools import lru_cache

from ..errors import InputRefused

ELEMENTS = (
    "H He Li Be B C N O F Ne Na Mg Al Si P S Cl Ar K Ca Sc Ti V Cr Mn Fe Co Ni Cu Zn Ga Ge As Se "
    "Br Kr Rb Sr Y Zr Nb Mo Tc Ru Rh Pd Ag Cd In Sn Sb Te I Xe Cs Ba La Ce Pr Nd Pm Sm Eu Gd Tb "
    "Dy Ho Er Tm Yb Lu Hf Ta W Re Os Ir Pt Au Hg Tl Pb Bi Po At Rn Fr Ra Ac Th Pa U"
).split()
MOLECULES = (
    "O2 H2O OH CH CH+ CN C2 CO MgH CaH FeH TiO VO NH SiO CO2 O3 H2 C3 SiH CH4 N2O".split()
)
DIFFUSE_BAND = "DIB"
ROMAN = (
    "I II III IV V VI VII VIII IX X XI XII XIII XIV XV XVI XVII XVIII XIX XX XXI XXII XXIII XXIV "
    "XXV XXVI XXVII"
).split()
_STAGE = {numeral: k + 1 for k, numeral in enumerate(ROMAN)}
_ATOMIC_NUMBER = {symbol: z + 1 for z, symbol in enumerate(ELEMENTS)}
_CURE = "write a species as 'Fe I', '[O III]', 'CH+' or 'DIB'"


@dataclass(frozen=True)
class Species:
    """One species; ``str()`` gives the canonical name.

    element: chemical symbol ('' for molecules and diffuse bands)
    stage: 1 neutral, 2 singly ionised ... (0 for molecules and diffuse bands)
    brackets: 0 permitted, 1 semi-forbidden ('C III]'), 2 forbidden ('[O III]')
    molecule: molecule or band name ('' for atoms)
    """

    element: str = ""
    stage: int = 0
    brackets: int = 0
    molecule: str = ""

    @property
    def atomic_number(self) -> int:
        """Nuclear charge; 0 for molecules and diffuse bands."""
        return _ATOMIC_NUMBER.get(self.element, 0)

    @property
    def is_atomic(self) -> bool:
        return bool(self.element)

    @property
    def is_forbidden(self) -> bool:
        return self.brackets == 2

    @property
    def ion(self) -> str:
        """The name without forbidden-line brackets ('O III')."""
        return self.molecule or f"{self.element} {ROMAN[self.stage - 1]}"

    @property
    def sort_key(self) -> tuple:
        """Orders by atomic number, stage, brackets; molecules after the atoms."""
        return (self.atomic_number or 999, self.stage, self.brackets, self.molecule)

    def __str__(self) -> str:
        return ("[" if self.brackets == 2 else "") + self.ion + ("]" if self.brackets else "")


def _number(text: str, exact: bool) -> int:
    """Ionisation stage of an arabic or roman numeral; 0 where it is none."""
    if text.isdigit() and 0 < int(text) <= len(ROMAN):
        return int(text)
    return _STAGE.get(text if exact else text.upper(), 0)


def _readings(core: str, exact: bool) -> list[Species]:
    """All ways to split ``core`` into a chemical symbol and a stage."""
    found = []
    for size in (1, 2):
        symbol, rest = core[:size], core[size:].strip()
        symbol = symbol if exact else symbol.capitalize()
        stage = _number(rest, exact)
        if symbol in _ATOMIC_NUMBER and 0 < stage <= _ATOMIC_NUMBER[symbol] + 1:
            found.append(Species(symbol, stage))
    return found


def _from_code(text: str) -> Species | None:
    """'26.1' (atomic number . charge) as used by stellar abundance line lists."""
    match = re.fullmatch(r"(\d{1,2})\.(\d)0*", text)
    if not match or not 1 <= int(match[1]) <= len(ELEMENTS):
        return None
    charge = int(match[2])
    return Species(ELEMENTS[int(match[1]) - 1], charge + 1) if charge <= int(match[1]) else None


def _molecule_readings(core: str) -> list[Species]:
    return [Species(molecule=m) for m in MOLECULES if m.lower() == core.lower()]


@lru_cache(maxsize=4096)
def parse_species(text: str) -> Species:
    """Species of a name: 'fe1', 'FeI', 'Fe I', '[OIII]', 'C III]', '26.1', 'CH+', 'DIB'.

    Exact spelling wins ('O2' is the molecule, 'CO' carbon monoxide); a name that stays
    ambiguous ('siii', 'o2') raises InputRefused, as does one that names nothing.
    """
    stripped = " ".join(str(text).split())
    opened, closed = stripped.startswith("["), stripped.endswith("]")
    core = stripped.strip("[]").strip()
    if opened and not closed:
        raise InputRefused(f"species '{text}'", "a bracket is missing", _CURE)
    brackets = 2 if opened else int(closed)
    coded = _from_code(core)
    if coded is not None and not brackets:
        return coded
    if not brackets and core.upper() in (DIFFUSE_BAND, "DIBS"):
        return Species(molecule=DIFFUSE_BAND)
    if not brackets and core in MOLECULES:
        return Species(molecule=core)
    readings = _readings(core, exact=True) or _readings(core, exact=False)
    if not brackets and not (readings and core[:2].strip().istitle() and " " in core):
        readings = readings + _molecule_readings(core)
    if not readings:
        raise InputRefused(f"species '{text}'", "not the name of an atom, ion or molecule", _CURE)
    if len(readings) > 1:
        names = " or ".join(str(r) for r in readings)
        raise InputRefused(f"species '{text}'", f"could mean {names}", "write it with a space")
    found = readings[0]
    return Species(found.element, found.stage, brackets, found.molecule)


def normal_name(text: str) -> str:
    """Canonical name of a species; raises InputRefused as ``parse_species``."""
    return str(parse_species(text))


def parse_species_list(text: str) -> tuple[str, ...]:
    """Canonical names of a comma-separated list ('Fe I, Ti II'), in order, without repeats."""
    names = [normal_name(part) for part in text.split(",") if part.strip()]
    if not names:
        raise InputRefused("species", "the list is empty", _CURE)
    return tuple(dict.fromkeys(names))
