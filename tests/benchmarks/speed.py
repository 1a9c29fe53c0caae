"""Time and memory of an audit, against the library's own batch encoding of the same documents.

    python tests/benchmarks/speed.py CORPUS.jsonl VOCAB [VOCAB ...]

CORPUS holds a `text` field; VOCAB is a folder or file. Each run is a whole process, start-up and
reports included; the peer reads the same file and calls `encode_batch_fast` (or the batch call of
its library) and nothing else. Needs the extra `outside` (psutil).
"""

from __future__ import annotations

import json
import subprocess
import sys
import tempfile
import time
from pathlib import Path

import psutil

PEER = """
import json, sys
from pathlib import Path
texts = [json.loads(line)["text"] for line in open(sys.argv[1], encoding="utf-8")]
path = Path(sys.argv[2])
model = path if path.is_file() else next(
    path / name for name in ("tokenizer.json", "tokenizer.model") if (path / name).exists()
)
if model.suffix == ".json":
    from tokenizers import Tokenizer
    library = Tokenizer.from_file(str(model))
    library.no_truncation()
    library.no_padding()
    encode = lambda batch: library.encode_batch_fast(batch, add_special_tokens=False)
else:
    from sentencepiece import SentencePieceProcessor
    encode = SentencePieceProcessor(model_file=str(model)).encode
for begin in range(0, len(texts), 1000):
    encode(texts[begin : begin + 1000])
"""


def run(command: list[str]) -> tuple[float, float]:
    """Run ``command`` and return its seconds and the peak of all its processes' memory in MB."""
    began, peak = time.monotonic(), 0
    with psutil.Popen(command, stdout=subprocess.DEVNULL) as process:
        while process.poll() is None:
            peak = max(peak, _together(process))
            time.sleep(0.2)
    if process.returncode:
        raise SystemExit(f"{command[:3]} ended with {process.returncode}")
    return time.monotonic() - began, peak / 1e6


def _together(process: psutil.Popen) -> int:
    total = 0
    for one in (process, *process.children(recursive=True)):
        try:
            total += one.memory_full_info().pss
        except psutil.Error:
            continue
    return total


def main(corpus: str, vocabularies: list[str]) -> None:
    """Print one line a vocabulary and way of encoding."""
    size = Path(corpus).stat().st_size / 1e6
    print(f"{corpus}: {size:.0f} MB, {psutil.cpu_count()} cores")
    for vocabulary in vocabularies:
        peer, _ = run([sys.executable, "-c", PEER, corpus, vocabulary])
        print(f"{vocabulary}: the library alone {peer:.1f} s")
        for way in ([], ["--whole"]):
            with tempfile.TemporaryDirectory() as folder:
                audit = ["-m", "auditor", "assess", corpus, "--vocab", vocabulary, "--quiet", *way]
                seconds, peak = run([sys.executable, *audit, "--out", f"{folder}/audit"])
                told = json.loads(Path(folder, "audit", "run.json").read_bytes())
            pieces = told["pieces"]
            print(
                f"  {'whole' if way else 'by pieces'}: {seconds:.1f} s, {size / seconds:.1f} MB/s,",
                f"{peer / seconds:.2f} × the library's speed, peak {peak:.0f} MB,",
                f"{pieces['measured']:,} of {pieces['occurrences']:,} pieces measured",
            )


if __name__ == "__main__":
    main(sys.argv[1], sys.argv[2:])
