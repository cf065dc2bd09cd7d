"""The house's own laws, checked on the syntax trees of every module."""

import ast
import tomllib
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[2]
PACKAGE = ROOT / "screener"

FOUNDATION = {"records", "settings", "columns", "units", "files"}
MAY_USE = {
    "records": set(),
    "settings": {"records"},
    "columns": {"records"},
    "files": {"records"},
    "limit_names": set(),
    "units": {"records", "columns"},
    "standards": {"records"},
    "mechanics": {"records"},
    "pressure": {"records"},
    "fatigue": {"records"},
    "inventory": FOUNDATION | {"standards"},
    "limits": {"records", "limit_names", "standards", "mechanics", "pressure", "fatigue"},
    "likelihood": {"records", "limits", "mechanics"},
    "priority": {"records", "columns", "likelihood", "limits", "mechanics"},
    "screening": FOUNDATION | {"inventory", "standards", "mechanics", "pressure", "fatigue", "limits", "limit_names", "likelihood", "priority"},
    "from_logs": FOUNDATION | {"inventory", "pressure"},
    "outputs": FOUNDATION | {"inventory", "standards", "mechanics", "pressure", "fatigue", "limits", "limit_names", "likelihood", "priority", "screening"},
    "cli": {"records", "settings", "screening", "from_logs", "outputs", "inventory", "pressure"},
    "__main__": {"cli"},
    "__init__": set(),
}
MODULES = sorted(path for path in PACKAGE.rglob("*.py"))
PHYSICS = ("mechanics", "pressure", "fatigue", "likelihood", "limits")


def room_of(path: Path) -> str:
    parts = path.relative_to(PACKAGE).parts
    return parts[0].removesuffix(".py")


def imports_of(path: Path) -> set[str]:
    """Rooms this module imports, also inside functions."""
    found = set()
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        names = []
        if isinstance(node, ast.Import):
            names = [alias.name for alias in node.names]
        elif isinstance(node, ast.ImportFrom):
            assert node.level <= 1, f"{path}: import from above its own room"
            if node.level == 1:
                assert path.parent != PACKAGE, f"{path}: relative import at the top"
                continue
            names = [node.module or ""]
            if node.module == "screener":
                names = [f"screener.{alias.name}" for alias in node.names]
        for name in names:
            parts = name.split(".")
            if parts[0] == "screener" and len(parts) > 1 and not parts[1].startswith("__"):
                found.add(parts[1])
    return found


@pytest.mark.parametrize("path", MODULES, ids=lambda p: str(p.relative_to(PACKAGE)))
def test_a_room_imports_only_what_it_may(path):
    room = room_of(path)
    assert room in MAY_USE, f"{path.name} stands in no room of the house"
    wrong = imports_of(path) - MAY_USE[room] - {room}
    assert not wrong, f"{path.relative_to(ROOT)} imports {sorted(wrong)}"


@pytest.mark.parametrize("path", [p for p in MODULES if room_of(p) in PHYSICS], ids=lambda p: str(p.relative_to(PACKAGE)))
def test_physics_never_turns_unknown_into_a_number(path):
    text = path.read_text(encoding="utf-8")
    for node in ast.walk(ast.parse(text)):
        if isinstance(node, ast.ExceptHandler):
            assert node.type is not None, f"{path}: bare except"
        if isinstance(node, ast.Attribute):
            assert node.attr not in ("fillna", "nan_to_num"), f"{path}:{node.lineno}: {node.attr}"


def test_mechanics_and_fatigue_know_no_tables():
    for path in MODULES:
        if room_of(path) in ("mechanics", "fatigue", "likelihood"):
            for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
                if isinstance(node, ast.Import):
                    assert not any(alias.name.split(".")[0] == "pandas" for alias in node.names), path
                if isinstance(node, ast.ImportFrom):
                    assert (node.module or "").split(".")[0] != "pandas", path


def test_top_level_holds_only_what_it_should():
    allowed = {"README.md", "DEVELOPERS.md", "pyproject.toml", "screener", "tests", "sample_inventory", "reports"}
    made = {"build", "pipeline_joint_screener.egg-info"}
    seen = {p.name for p in ROOT.iterdir() if not p.name.startswith(".")}
    assert seen - made <= allowed


def test_every_result_column_is_complete():
    results = tomllib.loads((PACKAGE / "data" / "result_columns.toml").read_text(encoding="utf-8"))
    for name, entry in results.items():
        assert entry["label"] and entry["meaning"].endswith("."), name
        if "dimension" in entry:
            assert entry["unit"] and entry["us"] and entry["metric"], name


def test_synonyms_belong_to_one_attribute_only():
    attributes = tomllib.loads((PACKAGE / "data" / "inventory_attributes.toml").read_text(encoding="utf-8"))
    owner = {}
    for name, entry in attributes.items():
        for word in entry["synonyms"]:
            assert word not in owner, f"{word!r} belongs to {owner.get(word)} and {name}"
            owner[word] = name
