"""What the program finds of burners that are heated much agrees with an independent march, one point and one place after another."""

from __future__ import annotations

import pytest

import cycle
from tests import scalar_march
from tests.dual_mode_rigs import scalar_duct
from tests.heavy_rigs import confirm, heavy_rig
from tests.random_flowpath import loaded

WITHOUT = (82, 127, 590, 638)
"""Heavy rigs without a mode for several reasons: no passage, one that chokes behind its throat, none within the impulse."""

UNSTARTED = (
    7, 8, 12, 20, 22, 30, 33, 34, 36, 37, 39, 40, 42, 50, 52, 53, 55, 62, 65, 68, 71, 75, 81, 87, 95, 98, 99, 102, 105, 107, 110,
    113, 114, 134, 138, 139, 140, 141, 144, 147, 164, 169, 174, 191, 192, 194, 197, 199, 200, 203, 204, 209, 211, 213, 214, 217, 224,
    231, 233, 234, 236, 238, 241, 250, 261, 270, 275, 281, 289, 292, 296, 298, 301, 302, 303, 304, 310, 320, 333, 335, 339, 346, 350,
    364, 366, 369, 370, 372, 373, 376, 377, 378, 379, 382, 384, 388, 390, 391, 392, 407, 408, 409, 413, 415, 418, 419, 420, 424, 426,
    432, 434, 442, 453, 454, 467, 468, 469, 470, 496, 498, 507, 508, 510, 516, 517, 536, 544, 556, 560, 561, 564, 566, 567, 571, 573,
    574, 585, 586, 588, 600, 603, 606, 610, 611, 613, 633, 643, 646, 655, 662, 664, 665, 670, 673, 678, 679, 684, 686, 688, 689, 693,
    694, 696, 704, 707, 715, 716, 717, 718, 726, 730, 733, 734, 741, 744, 750, 752, 755, 764, 772, 773, 774, 785, 787, 789, 796, 799,
    802,
)  # fmt: skip
"""The first that are unstarted; constant gamma and frozen gas."""

BLOCKS = 20

WITH_MODE = {
    17: "scramjet", 2: "scramjet", 1: "scramjet-shock-train", 3: "scramjet-shock-train", 6: "ramjet-thermal-throat",
    57: "ramjet-thermal-throat", 355: "ramjet-thermal-throat", 527: "scramjet-shock-train",
}  # fmt: skip
"""Some that run; 355 and 527 do it within a few hundredths of Mach 1."""


@pytest.mark.parametrize("block", range(BLOCKS))
def test_unstarted_have_no_flow_in_a_plain_march(block: int) -> None:
    """No attached supersonic flow, no shock train and no throat within the impulse that arrives."""
    seeds = sorted((*WITHOUT, *UNSTARTED))[block::BLOCKS]
    assert len(seeds) >= 9
    for seed in seeds:
        status, own, plain = confirm(seed)
        assert own == "none" and plain in ("unstarted", "choked", "none"), (seed, own, plain)
        assert seed in WITHOUT or status == plain == "unstarted", (seed, status, plain)


@pytest.mark.parametrize("seed", WITH_MODE)
def test_mode_found_is_that_of_a_plain_march(seed: int) -> None:
    """The same march finds the modes that stand, so that its "none" means something."""
    assert confirm(seed) == ("solved", WITH_MODE[seed], WITH_MODE[seed])


def test_plain_march_meets_the_program_where_the_flow_is_attached() -> None:
    """The two share no code: exit pressure and speed of an attached duct to the plain march's own error.

    Its polynomials pass over the joint of the species data at 1000 K, which costs some 1e-6.
    """
    walks = [cycle.solve(loaded(heavy_rig(seed))) for seed in range(20)]
    attached = [walk for walk in walks if walk.mode == "rig" and walk.processes[0].figures.get("mode_scramjet") == 1.0]
    assert len(attached) >= 3
    for walk in attached:
        duct = scalar_duct(walk)
        last = scalar_march.attached(duct, 0, 0.0, duct.impulse + duct.pieces[0].kick, fast=True)[0][-1]
        assert [last.pressure, last.w**0.5] == pytest.approx([walk.station["4"].pressure, walk.station["4"].velocity], rel=1e-5)
