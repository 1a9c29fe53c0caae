"""Which files make up a corpus."""

from __future__ import annotations

import io
import os
import sys
import threading
from types import SimpleNamespace

import pyarrow as pa
import pytest

from auditor.corpus import ReadOptions, find_sources, read, resolve_fields
from auditor.errors import CorpusError
from tests.unit.corpus.writing import arrow, read_back

GOOD = '{"text": "buoy"}\n'


def fill(folder, *names):
    for name in names:
        (folder / name).parent.mkdir(parents=True, exist_ok=True)
        (folder / name).write_text(GOOD)


def names(folder, *arguments):
    found = find_sources([str(folder / argument) for argument in arguments])
    return [os.path.relpath(source.name, folder) for source in found]


def test_a_folder_is_searched_in_the_order_of_names(tmp_path):
    """Known suffixes only, also compressed and in capitals; what begins with a dot is left out."""
    fill(tmp_path, "b/two.jsonl", "b/one.JSONL.gz", "a.txt", "c.png", ".git/d.txt", "b/.e.txt")
    assert names(tmp_path, "") == ["a.txt", "b/one.JSONL.gz", "b/two.jsonl"]


def test_descriptions_beside_a_saved_data_set_are_passed_over(tmp_path):
    """Its tables are streams; the two JSON files are no records."""
    fill(tmp_path, "state.json", "dataset_info.json", "README.md")
    table = arrow(pa.ipc.new_stream)([{"text": "mast"}])
    (tmp_path / "data-00000.arrow").write_bytes(table)
    assert read_back(tmp_path).texts == ["mast"]


def test_a_readme_among_texts_is_a_text(tmp_path):
    """It is left out only where records lie beside it."""
    fill(tmp_path, "README.md", "a.txt")
    assert names(tmp_path, "") == ["README.md", "a.txt"]


def test_links_that_lead_in_a_circle_end(tmp_path):
    """Each file is found once, whatever leads to it."""
    fill(tmp_path, "a/one.txt")
    (tmp_path / "a" / "back").symlink_to(tmp_path, target_is_directory=True)
    (tmp_path / "z").symlink_to(tmp_path / "a", target_is_directory=True)
    assert names(tmp_path, "") == ["a/one.txt"]


def test_globs_and_repetitions_name_each_file_once(tmp_path):
    """A file that two arguments name is read once, at the first."""
    fill(tmp_path, "a.txt", "b.txt", "deep/er/c.txt")
    assert names(tmp_path, "b*", "*.txt", "**/*.txt") == ["b.txt", "a.txt", "deep/er/c.txt"]


def test_a_name_with_brackets_is_a_file_before_it_is_a_pattern(tmp_path):
    """Exact names come first."""
    fill(tmp_path, "notes[1].txt", "notes1.txt")
    assert names(tmp_path, "notes[1].txt") == ["notes[1].txt"]


def test_a_missing_file_is_told_with_those_near_it(tmp_path):
    """The hint lists what the folder holds that is spelled alike."""
    fill(tmp_path, "notes.jsonl")
    with pytest.raises(CorpusError, match=r"no such file\. Near it: notes\.jsonl"):
        names(tmp_path, "note.jsonl")
    with pytest.raises(CorpusError, match="no such folder"):
        names(tmp_path, "nothing/notes.jsonl")


def test_nothing_to_read_is_an_error(tmp_path):
    """A folder without a known suffix, a pattern without a match, an unknown format."""
    fill(tmp_path, "empty/a.png")
    (tmp_path / "a.bin").write_bytes(bytes(9))
    for argument, told in (("empty", "no file"), ("*.csv", "no file"), ("a.bin", "unknown")):
        with pytest.raises(CorpusError, match=told):
            names(tmp_path, argument)


def test_remote_input_is_refused(tmp_path):
    """The error says what to do instead."""
    with pytest.raises(CorpusError, match=r"not built in this version\. Copy the file here"):
        find_sources(["https://example.org/notes.jsonl"])


def test_an_unknown_suffix_is_read_when_the_content_tells(tmp_path):
    """JSON lines and tables are recognised by what they hold."""
    fill(tmp_path, "notes.data")
    assert read_back(tmp_path / "notes.data").texts == ["buoy"]


def test_sizes_are_those_on_the_disk(tmp_path):
    """They add up to what the progress reaches at the end."""
    fill(tmp_path, "a.jsonl", "b.jsonl", "c.txt.gz")
    sources = find_sources([str(tmp_path)])
    reached, fields = [], resolve_fields(sources, ReadOptions())
    list(read(sources, ReadOptions(), fields, progress=reached.append))
    assert reached[-1] == sum(source.size for source in sources) == 3 * len(GOOD)
    assert reached == sorted(reached)


@pytest.mark.parametrize(
    ("content", "texts"),
    [
        (b'\n{"text": "buoy"}\nnull\n{"text": "mast"}\n', ["buoy", "mast"]),
        (b"buoy\n{mast}\n", ["buoy", "{mast}"]),
        (b'[{"text": "buoy"},\n{"text": "mast"}]', ["buoy", "mast"]),
        (b"\xef\xbb\xbfbuoy", ["buoy"]),
        (b"", []),
    ],
)
def test_standard_input_is_recognised_and_read_from_its_beginning(content, texts, monkeypatch):
    """What the first look takes is not lost, also where the input is longer than the look."""
    monkeypatch.setattr(sys, "stdin", SimpleNamespace(buffer=io.BytesIO(content)))
    assert read_back("-").texts == texts


def test_long_standard_input_is_read_whole(monkeypatch):
    """Far more records than the first look takes."""
    content = "".join(f'{{"text": "buoy {n}"}}\n' for n in range(50_000)).encode()
    monkeypatch.setattr(sys, "stdin", SimpleNamespace(buffer=io.BytesIO(content)))
    assert read_back("-").texts == [f"buoy {n}" for n in range(50_000)]


def test_standard_input_has_no_size_and_is_read_once(monkeypatch):
    """A second reading is an error and not an empty corpus."""
    monkeypatch.setattr(sys, "stdin", SimpleNamespace(buffer=io.BytesIO(b"buoy\n")))
    [source] = find_sources(["-"])
    fields = resolve_fields([source], ReadOptions())
    assert source.size is None
    assert [b.texts for b in read([source], ReadOptions(), fields)] == [["buoy"]]
    with pytest.raises(CorpusError, match="once"):
        list(read([source], ReadOptions(), fields))


def test_a_named_pipe_is_read(tmp_path):
    """What another program writes into it, a table included."""
    pipe = tmp_path / "pipe"
    os.mkfifo(pipe)
    content = arrow(pa.ipc.new_file)([{"text": "buoy"}] * 9)
    writer = threading.Thread(target=pipe.write_bytes, args=(content,))
    writer.start()
    assert read_back(pipe).texts == ["buoy"] * 9
    writer.join()
