"""What one poll gathers."""

from __future__ import annotations

from vanner.records import RawItem

BATCH_BYTES = 32 * 2**20


class Batch:
    """Items and faults, bounded in their number and in the bytes that the items hold."""

    def __init__(self, most: int, most_bytes: int = BATCH_BYTES) -> None:
        self.items: list[RawItem] = []
        self.faults: list[str] = []
        self._most = most
        self._left_bytes = most_bytes

    @property
    def full(self) -> bool:
        """Whether the poll should end here."""
        return len(self.items) + len(self.faults) >= self._most or self._left_bytes <= 0

    def add(self, item: RawItem, size_bytes: int) -> None:
        """Take in an item; the one that fills the batch is still taken."""
        self.items.append(item)
        self._left_bytes -= size_bytes

    def rest(self) -> Batch:
        """An empty batch of what still fits into this one."""
        return Batch(self._most - len(self.items) - len(self.faults), self._left_bytes)

    def join(self, part: Batch) -> None:
        """Take over what a batch made by `rest` has gathered."""
        self.items += part.items
        self.faults += part.faults
        self._left_bytes = part._left_bytes
