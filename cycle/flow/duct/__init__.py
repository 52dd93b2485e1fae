"""The duct march: attached, behind a shock train, or choked by its own heat.

From the bottom up: `panels` (where nodes stand), `layout` (area, fuel, walls along x), `line` (states at a velocity),
`scan` and `summits` (sonic states, and where a curve tops), `march` (the attached flow), `throat`, `core`, `reattach`,
`cooling`, then `solution` and `modes`, which choose; `margins` say how far a border is.
"""
