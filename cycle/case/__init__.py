"""What the user asks for: validated cases, their files, differences between them."""

from cycle.case.batch import check_batch
from cycle.case.case import Case, Stamp, Stated, thawed
from cycle.case.checking import json_schema
from cycle.case.difference import INPUT_GROUPS, differences, taking
from cycle.case.files import load, loads, read_setting, save
from cycle.case.template import template

__all__ = [
    "INPUT_GROUPS",
    "Case",
    "Stamp",
    "Stated",
    "check_batch",
    "differences",
    "json_schema",
    "load",
    "loads",
    "read_setting",
    "save",
    "taking",
    "template",
    "thawed",
]
