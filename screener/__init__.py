"""Screens the flanged joints of polyethylene pressure mains."""

from __future__ import annotations

__all__ = ["Settings", "read_inventory", "read_settings", "screen"]
__version__ = "0.1.0"

_HOMES = {
    "Settings": "screener.settings",
    "read_settings": "screener.settings",
    "read_inventory": "screener.inventory.read",
    "screen": "screener.screening",
}


def __getattr__(name: str):
    # Heavy rooms load when first asked for, so that the command answers at once.
    if name in _HOMES:
        from importlib import import_module

        return getattr(import_module(_HOMES[name]), name)
    raise AttributeError(f"module 'screener' has no attribute {name!r}")
