"""Streams one channel into its dataset, chunk by chunk."""

from __future__ import annotations

import h5py
import numpy as np

from chainsim.integration.samples import BLOCK_SAMPLES
from chainsim.recording.channels import Channel
from chainsim.recording.packing import Packer
from chainsim.recording.tail import Rest

NARROW_CHUNK = 256 * 1024
"""Size [bytes] up to which the chunks of a narrow channel are made longer: fewer, larger writes."""
LONGEST = 16
"""Most blocks in a chunk [dimensionless]; bounds what a flush puts into the tail."""


def chunk_samples(row: Channel, shape: tuple[int, ...]) -> int:
    """Return the number of samples in a chunk of a channel.

    Parameters
    ----------
    row : Channel
        The channel.
    shape : tuple of int
        Shape of one sample [dimensionless].

    Returns
    -------
    int
        `BLOCK_SAMPLES` times a power of two [dimensionless].
    """
    block = BLOCK_SAMPLES * np.dtype(row.dtype).itemsize * int(np.prod(shape))
    blocks = 1
    while blocks < LONGEST and 2 * blocks * block <= NARROW_CHUNK:
        blocks *= 2
    return blocks * BLOCK_SAMPLES


class Lane:
    """Buffers one channel up to a chunk and writes it, packed, when it is full.

    Parameters
    ----------
    dataset : Dataset
        Where it goes: empty, chunked by `chunk_samples`, filtered by shuffle and deflate.
    """

    def __init__(self, dataset: h5py.Dataset) -> None:
        self.buffer = np.zeros(dataset.chunks, dataset.dtype)
        self._id = dataset.id
        self._packer = Packer()
        self._written = 0
        self._fill = 0

    def push(self, values: np.ndarray) -> None:
        """Take values, write each chunk that gets full.

        Parameters
        ----------
        values : ndarray, shape (m, ...)
            Values in the unit of the channel.
        """
        start, size = 0, len(self.buffer)
        while start < len(values):
            take = min(size - self._fill, len(values) - start)
            piece = values[start : start + take]
            start += take
            if take == size and piece.dtype == self.buffer.dtype and piece.flags.c_contiguous:
                self._write(piece, size)
                continue
            self.buffer[self._fill : self._fill + take] = piece
            self._fill += take
            if self._fill == size:
                self._write(self.buffer, size)
                self._fill = 0

    def rest(self) -> Rest:
        """Return the samples that do not fill a chunk yet."""
        return Rest(self._written, self.buffer[: self._fill])

    def finish(self) -> None:
        """Write the last chunk, padded with zeros that the dataset's length leaves out."""
        if self._fill:
            self.buffer[self._fill :] = 0
            self._write(self.buffer, self._fill)
            self._fill = 0

    def _write(self, chunk: np.ndarray, samples: int) -> None:
        tail = chunk.shape[1:]
        self._id.set_extent((self._written + samples, *tail))
        self._id.write_direct_chunk((self._written, *(0 for _ in tail)), self._packer.pack(chunk))
        self._written += samples
