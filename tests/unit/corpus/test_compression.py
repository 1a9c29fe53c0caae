"""Compressed streams: found by content, bounded in memory, honest about damage."""

from __future__ import annotations

import gzip
import tracemalloc

import pytest
import zstandard

from tests.unit.corpus.writing import PACK, parquet, read_back, read_bytes

PACKED = [suffix for suffix in PACK if suffix]
LINES = [f"buoy {n * 7919 % 10007} at {n * 104729 % 99991}" for n in range(20_000)]
CONTENT = "".join(line + "\n" for line in LINES).encode()


@pytest.mark.parametrize("suffix", PACKED)
def test_compression_is_found_without_its_suffix(suffix, tmp_path):
    """Magic bytes win over the name, in both directions."""
    assert read_bytes(tmp_path, "a.txt", PACK[suffix](b"buoy\n")).texts == ["buoy"]
    assert read_bytes(tmp_path, f"b.txt{suffix}", b"buoy\n").texts == ["buoy"]


@pytest.mark.parametrize("suffix", PACKED)
def test_streams_that_follow_each_other_are_one(suffix, tmp_path):
    """Compressed files may be put one behind the other, with zeros between them."""
    pack = PACK[suffix]
    content = pack(b"buoy\nli") + pack(b"ght\n") + bytes(8) + pack(b"mast\n") + bytes(4)
    assert read_bytes(tmp_path, "a.txt", content).texts == ["buoy", "light", "mast"]


@pytest.mark.parametrize("share", [0.3, 0.9, 1.0])
@pytest.mark.parametrize("suffix", PACKED)
def test_a_stream_that_ends_early_gives_what_came_before(suffix, share, tmp_path):
    """The lines are a beginning of the whole; exactly one record is set aside, right behind."""
    content = PACK[suffix](CONTENT)
    found = read_bytes(tmp_path, "a.txt", content[: int(len(content) * share) - 3])
    assert found.texts == LINES[: len(found.texts)]
    assert found.places == [(len(found.texts) + 1, "compressed stream ends early")]


@pytest.mark.parametrize("suffix", [".gz", ".zst"])
def test_everything_before_the_cut_is_read(suffix, tmp_path):
    """A cut of three bytes costs the last lines of the last block at most."""
    found = read_bytes(tmp_path, "a.txt", PACK[suffix](CONTENT)[:-3])
    assert len(found.texts) > len(LINES) * 0.6


@pytest.mark.parametrize("suffix", PACKED)
def test_a_damaged_stream_is_told(suffix, tmp_path):
    """Bytes in the middle that are no longer what they were end the reading near there."""
    content = bytearray(PACK[suffix](CONTENT))
    middle = len(content) // 2
    content[middle : middle + 64] = b"\xff" * 64
    found = read_bytes(tmp_path, "a.txt", bytes(content))
    [flaw] = found.set_aside
    assert flaw.reason in {"compressed stream is damaged", "compressed stream ends early"}
    sound = min(len(found.texts), len(LINES) // 3)
    assert found.texts[:sound] == LINES[:sound]


@pytest.mark.parametrize("suffix", [".jsonl", ".json", ".csv"])
def test_a_cut_record_is_told_once(suffix, tmp_path):
    """The record in which the stream breaks off is not told a second time as broken."""
    rows = {
        ".jsonl": "".join(f'{{"text": "{line}"}}\n' for line in LINES),
        ".json": "[" + ", ".join(f'{{"text": "{line}"}}' for line in LINES) + "]",
        ".csv": "text\n" + "".join(f'"{line}\n{line}"\n' for line in LINES),
    }
    packed = gzip.compress(rows[suffix].encode())
    found = read_bytes(tmp_path, f"a{suffix}.gz", packed[: len(packed) // 2])
    assert [flaw.reason for flaw in found.set_aside] == ["compressed stream ends early"]
    assert len(found.texts) > 1000
    assert not found.mended


def test_a_compressed_table_that_ends_early_is_told(tmp_path):
    """A Parquet file without its end cannot be read at all."""
    packed = gzip.compress(parquet([{"text": "a"}]))[:-12]
    found = read_bytes(tmp_path, "a.parquet.gz", packed)
    assert found.places == [(1, "compressed stream ends early")]


def test_a_frame_that_may_be_skipped_is_skipped(tmp_path):
    """RFC 8878 §3.1.2: such frames carry user data and may stand anywhere."""
    skipped = b"\x50\x2a\x4d\x18" + (5).to_bytes(4, "little") + b"notes"
    content = skipped + zstandard.ZstdCompressor().compress(b"buoy\n") + skipped
    assert read_bytes(tmp_path, "a.txt", content).texts == ["buoy"]


@pytest.mark.parametrize("suffix", PACKED)
def test_memory_does_not_grow_with_what_a_stream_expands_to(suffix, tmp_path):
    """100 MB in few kilobytes are read with a small part of that allocated at any time."""
    blank = PACK[suffix]((b" " * 99_999 + b"\n") * 1000)
    (tmp_path / "a.txt").write_bytes(blank + PACK[suffix](b"buoy\n"))
    tracemalloc.start()
    try:
        texts = read_back(tmp_path / "a.txt").texts
        peak = tracemalloc.get_traced_memory()[1]
    finally:
        tracemalloc.stop()
    assert texts == ["buoy"]
    assert peak < 25_000_000
