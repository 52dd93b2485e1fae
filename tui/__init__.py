"""Everything a terminal shows: the batch command and the interactive screen."""
