"""Screens of the interactive program."""
