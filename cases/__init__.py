"""Invented cases, shipped with the program."""
