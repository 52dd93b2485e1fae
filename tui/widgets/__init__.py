"""Widgets of the interactive screen: each renders one part of the session and holds no state of its own."""
