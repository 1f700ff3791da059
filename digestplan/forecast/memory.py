"""Keeping memory for the next large array instead of handing it back after each."""

import numpy as np

_MOST = 31 * 2**20  # [bytes] the most that GNU's allocator takes as a hint


def keep_memory() -> None:
    """
    Tell the allocator that arrays of some megabytes come and go here.

    GNU's allocator hands freed memory of more than a threshold back to the system, which clears
    it again for the next array: with arrays of nodes and draws that costs more than what is done
    with them. The threshold grows to the largest block that was ever taken and given back; taking
    one that is never touched is enough and costs no memory. Elsewhere this does nothing.
    """
    np.empty(_MOST, dtype=np.uint8)
