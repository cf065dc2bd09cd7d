"""Screens flanged joints of polyethylene pressure mains."""
