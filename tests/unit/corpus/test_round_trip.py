"""Whatever is written is read back equal, in every format, compression and size of batch."""

from __future__ import annotations

import pyarrow as pa
import pytest
from hypothesis import given
from hypothesis import strategies as st

from tests.unit.corpus.writing import PACK, WRITE, arrow, parquet, read_bytes

TEXT = st.text(st.characters(exclude_categories=["Cs"]), max_size=20)
TEXTS = st.lists(TEXT, min_size=1, max_size=12)
SIZES = st.tuples(st.integers(1, 60), st.integers(1, 5))
KINDS = [
    pa.string(),
    pa.large_string(),
    pa.string_view(),
    pa.dictionary(pa.int32(), pa.string()),
    pa.binary(),
]


@pytest.mark.parametrize("pack", PACK)
@pytest.mark.parametrize("suffix", WRITE)
def test_texts_are_read_back(suffix, pack, tmp_path_factory):
    """Any texts written in a format and compressed are read back equal, for any batch size."""
    folder = tmp_path_factory.mktemp("corpus")

    @given(TEXTS, SIZES)
    def check(texts, sizes):
        content = PACK[pack](WRITE[suffix]([{"text": text} for text in texts]))
        limits = {"batch_bytes": sizes[0], "batch_documents": sizes[1]}
        found = read_bytes(folder, f"notes{suffix}{pack}", content, **limits)
        assert found.texts == texts
        assert not found.set_aside
        assert not found.mended

    check()


@pytest.mark.parametrize("kind", KINDS, ids=str)
@pytest.mark.parametrize("form", ["parquet", "stream", "file"])
def test_every_type_of_text_column_is_read(form, kind, tmp_path):
    """Plain, large, view and dictionary columns, and undeclared bytes, give the same texts."""
    if form == "parquet":
        content = parquet([{"text": t} for t in ("żuraw", "", "灯台")] * 5, kind)
    else:
        opened = pa.ipc.new_stream if form == "stream" else pa.ipc.new_file
        content = arrow(opened, kind)([{"text": t} for t in ("żuraw", "", "灯台")] * 5)
    assert read_bytes(tmp_path, "notes.parquet", content).texts == ["żuraw", "", "灯台"] * 5


def oracle_lines(text):
    lines = text.split("\n")
    return lines[:-1] if lines[-1] == "" else lines


@pytest.mark.parametrize("pack", PACK)
def test_text_files_follow_the_rules_of_their_units(pack, tmp_path_factory):
    """The four units agree with definitions written out in the plainest way."""
    folder = tmp_path_factory.mktemp("corpus")
    pieces = st.sampled_from(["a", "buoy ", "\n", "\r\n", "\u2028", " ", "é", "\n\n", "\t"])

    @given(st.lists(pieces, max_size=25).map("".join), SIZES)
    def check(text, sizes):
        def found(unit):
            limits = {"batch_bytes": sizes[0], "batch_documents": sizes[1]}
            packed = PACK[pack](text.encode())
            return read_bytes(folder, f"notes.txt{pack}", packed, unit=unit, **limits).texts

        lines = [line.removesuffix("\r") for line in oracle_lines(text)]
        assert found("line") == lines
        assert found("record") == [line for line in lines if line.strip(" \t\r")]
        assert found("file") == [text]
        runs = "\n".join(line if line.strip(" \t\r") else "" for line in oracle_lines(text))
        paragraphs = [run.strip("\n") for run in runs.split("\n\n")]
        assert found("paragraph") == [p.removesuffix("\r") for p in paragraphs if p]

    check()
