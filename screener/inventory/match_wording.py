"""What the wording of a heading can mean: units in it, the dictionary's words, abbreviations, likeness."""

from __future__ import annotations

import difflib
import re
from collections import Counter
from dataclasses import dataclass
from functools import cache, lru_cache

from screener.columns import Attribute, inventory_attributes
from screener.units import dimensions_of, find_unit, tidy

CLOSE_ENOUGH = 0.86
WORD_CLOSE_ENOUGH = 0.7
LONGEST = 50
# Words that alone say too little: used only when the values agree.
WEAK = frozenset(
    "od id class material notes rating year size pressure bolts bolt thickness thk line area x y z level profile surge cycles position finish route main "
    "objectid fid gid tag finding condition coating standard grade op ch".split()
) | {"object id", "pipe id", "unique id"}
# What such a word may mean besides the attribute whose synonym it is.
ALSO = {
    "id": ("ring_bore",),
    "od": ("ring_outside_diameter",),
    "class": ("pipe_pressure_class",),
    "pressure class": ("ring_class",),
    "material": ("ring_material", "bolt_grade"),
    "rating": ("ring_class", "pipe_pressure_class"),
    "flange rating": ("ring_class",),
    "pressure rating": ("stated_rating", "ring_class", "pipe_pressure_class"),
    "grade": ("bolt_grade", "pe_material", "ring_material"),
    "standard": ("ring_standard",),
    "type": ("ring_form",),
}
ABBREVIATIONS = {
    "press": "pressure", "pres": "pressure", "oper": "operating", "op": "operating", "opg": "operating", "max": "maximum", "min": "minimum",
    "dia": "diameter", "diam": "diameter", "nom": "nominal", "thk": "thickness", "thick": "thickness", "temp": "temperature",
    "no": "number", "nr": "number", "num": "number", "nos": "number", "qty": "number", "quantity": "number", "count": "number", "#": "number",
    "mat": "material", "matl": "material", "inst": "installed", "install": "installed", "installation": "installed", "yr": "year", "elev": "elevation",
    "std": "standard", "cl": "class", "coord": "coordinate", "flg": "flange", "lube": "lubrication", "insp": "inspection", "avg": "average", "tq": "torque", "trq": "torque",
    "od": "outside diameter", "outer": "outside", "inner": "inside", "sys": "system",
}  # fmt: skip
IDLE = frozenset({"of", "the", "at", "for", "a", "an"})
# Words of merged headings above the others: they say where the column belongs, not what it says.
GROUP_WORDS = frozenset(
    "pipe pipes ring rings backing stub end hub bolts bolt studs face faces setting site location pressures pressure history identity place consequence consequences "
    "if it leaks work programme program office use flange flanges joint joints data details general information existing asset hydraulic hydraulics dimensions inspection records main network".split()
)
# Words that change what follows them.
CHANGES = frozenset("min minimum lowest wall coating gasket nut washer liner lining soil air ambient nominal design differential suction previous old planned future required allowable allowed target distance difference number count length width cost price test surge nearest next".split())
IMPLIED_UNITS = {"dn": ("length", "mm"), "nps": ("length", "in"), "pn": ("pressure", "bar"), "pc": ("pressure", "psi")}
GEOMETRY = frozenset({"geometry", "geom", "the_geom", "wkb_geometry", "wkt", "shape", "shape_length", "shape_area", "shape.len", "shape.area"})


@dataclass(frozen=True)
class Meaning:
    """One thing a heading can mean: attribute, unit in the heading, why, how sure (1 is certain), whether the unit is only implied."""

    attribute: str
    unit: str
    reason: str
    strength: float
    implied: bool = False


def words_of(heading: str, keep_brackets: bool = True) -> list[str]:
    """The words of a heading: lower case, without punctuation; "JointID" and "joint_id" are two words."""
    text = re.sub(r"(?<=[a-z0-9])(?=[A-Z][a-z]|[A-Z]{2,}(?![a-z]))", " ", tidy(str(heading)).replace("_", " "))
    text = re.sub(r"[(\[{].*?[)\]}]", " ", text) if not keep_brackets else text
    text = re.sub(r"(?<=[a-z])\.(?=[a-z]\b)", "", text.lower())  # o.d. is od
    return re.findall(r"#|[^\W_]+(?:\+[^\W_]+)*", text)


def _singular(word: str) -> str:
    return word[:-1] if len(word) > 3 and word.endswith("s") and not word.endswith("ss") else word


def canonical(words: list[str]) -> tuple[str, ...]:
    """Words without abbreviations, plurals, order and idle words."""
    full = [part for word in words if word not in IDLE for part in ABBREVIATIONS.get(word, ABBREVIATIONS.get(_singular(word), _singular(word))).split()]
    return tuple(sorted(full))


@cache
def vocabulary() -> tuple[dict[str, tuple[str, str]], dict[tuple[str, ...], tuple[str, str]]]:
    """(wording -> (attribute, what it is), canonical words -> the same); wording that would mean two attributes is left out of the second."""
    exact: dict[str, tuple[str, str]] = {}
    for name, attribute in inventory_attributes().items():
        for text, what in ((attribute.machine_name, "its machine name"), (name, "its name"), (attribute.label, "its label")):
            exact[" ".join(words_of(text, keep_brackets=False))] = exact[" ".join(words_of(text))] = (name, what)
    for name, attribute in inventory_attributes().items():
        for text in attribute.synonyms:
            exact.setdefault(" ".join(words_of(text)), (name, f"synonym {text!r}"))
    folded: dict[tuple[str, ...], tuple[str, str]] = {}
    owners: dict[tuple[str, ...], set[str]] = {}
    for wording, meaning in exact.items():
        key = canonical(wording.split())
        folded.setdefault(key, meaning)
        owners.setdefault(key, set()).add(meaning[0])
    return exact, {key: meaning for key, meaning in folded.items() if len(owners[key]) == 1}


def unit_in_heading(heading: str, attribute: Attribute) -> str:
    """The unit a heading names, in brackets or among its words; "" when none."""
    return _split_unit(heading, attribute.dimension)[0] if attribute.dimension else ""


@lru_cache(maxsize=8192)
def _split_unit(heading: str, dimension: str) -> tuple[str, tuple[str, ...]]:
    """(unit of `dimension` in the heading or "", the heading's words without it)."""
    text = tidy(heading)
    for found in re.finditer(r"[(\[{]([^)\]}]*)[)\]}]?", text):
        inside = found.group(1).strip()
        for piece in (inside, *re.split(r"[,;]", inside), inside.split(" ")[0]):
            unit = find_unit(piece.strip(), dimension)
            if unit:
                rest = inside.replace(piece, " ", 1) if piece != inside else ""
                return unit, tuple(words_of(f"{text[: found.start()]} {rest} {text[found.end() :]}"))
    pieces = re.split(r"[\s_,;]+|(?<=\w)/(?=\w{2,}$)", text)
    pieces = [p for p in pieces if p]
    for count in (3, 2, 1):
        for start in range(len(pieces) - count, 0 if count == 1 else -1, -1):
            piece = " ".join(pieces[start : start + count]).strip("-:=[](){}").lstrip("+")
            last = start + count == len(pieces)
            if len(piece) < 2 and not (last and start > 0 and dimension in ("length", "temperature", "temperature_difference", "torque")):
                continue
            unit = find_unit(piece, dimension)
            if unit and start + count <= len(pieces) and count < len(pieces):
                return unit, tuple(words_of(" ".join(pieces[:start] + pieces[start + count :])))
    camel = words_of(heading)
    if len(camel) > len(pieces):
        for count in (2, 1):
            unit = find_unit(" ".join(camel[-count:]), dimension)
            if unit and len(camel) > count and len("".join(camel[-count:])) > 1:
                return unit, tuple(camel[:-count])
    return "", tuple(words_of(heading))


@lru_cache(maxsize=8192)
def meanings(heading: str) -> tuple[Meaning, ...]:
    """What a heading can mean, strongest first."""
    if heading.strip().lower() in GEOMETRY:
        return ()
    plain = words_of(heading)
    found = [m for words, dimension in _readings(heading, plain) for m in _by_dictionary(heading, list(words), dimension)]
    if not found:
        found = _under_another(heading, plain) or _without_brackets(heading) or _by_likeness(heading, plain)
    best: dict[str, Meaning] = {}
    for meaning in found:
        if meaning.attribute not in best or meaning.strength > best[meaning.attribute].strength:
            best[meaning.attribute] = meaning
    return tuple(sorted(best.values(), key=lambda m: -m.strength))


def _readings(heading: str, plain: list[str]) -> list[tuple[tuple[str, ...], str]]:
    """The heading's words as they stand, and without a unit of each dimension."""
    readings = [(tuple(plain), "")]
    for dimension in sorted({a.dimension for a in inventory_attributes().values() if a.dimension}):
        unit, words = _split_unit(heading, dimension)
        if unit and words:
            readings.append((words, dimension))
    return readings


def _by_dictionary(heading: str, words: list[str], dimension: str) -> list[Meaning]:
    """Meanings of words that stand in the dictionary; dimension: of the unit already taken off, "" for none."""
    exact, folded = vocabulary()
    while words and words[-1] in ("in", "per") and not dimension:
        words = words[:-1]
    words = [w for w in words if w != "in"] if dimension else words
    text = " ".join(words)
    key = canonical(words)
    if text in exact:
        (name, what), strength = exact[text], 1.0
    elif key in folded:
        (name, what), strength = folded[key], 0.9
    else:
        name, what, strength = "", "", 0.0
    made = [_meaning(heading, name, what, 0.6 if text in WEAK or " ".join(key) in WEAK else strength, dimension)] if name else []
    for other in ALSO.get(text, ()):
        made.append(_meaning(heading, other, f"the word {text!r}", 0.58, dimension))
    return [m for m in made if m]


def _meaning(heading: str, name: str, what: str, strength: float, dimension: str) -> Meaning | None:
    """A meaning with the heading's unit; None where a unit was taken off that the attribute doesn't have."""
    attribute = inventory_attributes()[name]
    if dimension and attribute.dimension != dimension:
        return None
    unit = unit_in_heading(heading, attribute)
    if unit:
        said = "a currency" if unit == "money" else f"unit {unit}"
        return Meaning(name, unit, f"{what}, {said} in the heading", strength + 0.05)
    for word in words_of(heading):
        if word in IMPLIED_UNITS and IMPLIED_UNITS[word][0] == attribute.dimension:
            unit = IMPLIED_UNITS[word][1]
            return Meaning(name, unit, f"{what}, unit {unit} by {word.upper()!r} in the heading", strength, implied=True)
    return Meaning(name, "", what, strength)


def _under_another(heading: str, plain: list[str]) -> list[Meaning]:
    """A merged heading above may have been joined on: the words below it speak for themselves."""
    pieces = heading.split()
    for start in range(1, len(pieces)):
        above, tail = words_of(" ".join(pieces[:start])), " ".join(pieces[start:])
        below = [m for words, dimension in _readings(tail, words_of(tail)) for m in _by_dictionary(tail, list(words), dimension)]
        if not below or any(word in CHANGES for word in above):
            continue
        known = all(word in GROUP_WORDS for word in above)
        kept = [m for m in below if _belongs(m, above, known, words_of(tail))]
        if kept:
            factor = 0.9 if known else 0.75
            return [Meaning(m.attribute, m.unit, f"{m.reason}, under {' '.join(pieces[:start])!r}", factor * m.strength, m.implied) for m in kept]
    return []


def _belongs(meaning: Meaning, above: list[str], known: bool, tail: list[str]) -> bool:
    """Whether a column under another heading can be trusted to be what its own words say."""
    group = words_of(inventory_attributes()[meaning.attribute].group)
    if meaning.strength < 0.7:
        return bool({_singular(w) for w in above} & {_singular(w) for w in group})
    return known or len(tail) > 1


def _without_brackets(heading: str) -> list[Meaning]:
    """The heading without words in brackets, where those don't change its sense."""
    inside = [w for piece in re.findall(r"[(\[{]([^)\]}]*)[)\]}]", tidy(heading)) for w in words_of(piece)]
    words = words_of(heading, keep_brackets=False)
    if not inside or not words or any(w in CHANGES or w in GROUP_WORDS for w in inside):
        return []
    made = _by_dictionary(heading, words, "")
    units = {d for piece in re.findall(r"[(\[{]([^)\]}]*)[)\]}]", tidy(heading)) for d in dimensions_of(piece.strip())}
    kept = [m for m in made if not units or not inventory_attributes()[m.attribute].dimension]
    return [Meaning(m.attribute, m.unit, m.reason, 0.8 * m.strength, m.implied) for m in kept]


def _by_likeness(heading: str, plain: list[str]) -> list[Meaning]:
    """The dictionary's closest wording, word by word, so that ring and pipe or min and max are never alike."""
    exact, _ = vocabulary()
    attributes = inventory_attributes()
    readings = {" ".join(words): dimension for words, dimension in reversed(_readings(heading, plain))}
    for text, dimension in sorted(readings.items(), key=lambda r: r[1]):
        if not 4 < len(text) <= LONGEST:
            continue
        near = [wording for wording in exact if abs(len(wording) - len(text)) <= 0.3 * len(text)]
        for close in difflib.get_close_matches(text, near, n=5, cutoff=CLOSE_ENOUGH):
            name, _what = exact[close]
            if (dimension and attributes[name].dimension != dimension) or not _same_words(text.split(), close.split()):
                continue
            likeness = difflib.SequenceMatcher(None, text, close).ratio()
            meaning = _meaning(heading, name, f"close to {close!r}", 0.7 * likeness, dimension)
            if meaning:
                return [meaning]
    return []


def _same_words(first: list[str], second: list[str]) -> bool:
    if re.findall(r"\d+", " ".join(first)) != re.findall(r"\d+", " ".join(second)):
        return False
    if len(first) != len(second):
        return difflib.SequenceMatcher(None, "".join(first), "".join(second)).ratio() >= 0.92 and not (Counter(first) - Counter(second)).keys() & CHANGES
    return all(difflib.SequenceMatcher(None, a, b).ratio() >= WORD_CLOSE_ENOUGH for a, b in zip(first, second, strict=True))
