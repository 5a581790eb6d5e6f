"""Files on disk: hostile ones, and writing them whole or not at all."""

from __future__ import annotations

import os
import re
import stat
import tomllib
from collections.abc import Callable
from pathlib import Path

import attrs
import numpy as np
import pytest

from springpoise import Arm, Body, Mechanism, Point, SpringMount, Straight, ZeroLengthSpring, guard
from springpoise.errors import InputError, InputTypeError, PoiseFileError
from springpoise.springs import ScaledSpring

Write = Callable[..., Path]


@pytest.mark.parametrize(
    ("content", "message"),
    [
        (b"", "is empty"),
        (b" \n\n", "is empty"),
        (b"schema = 1\n\xff\xfe", r"is not UTF-8 text: byte 12 is b'\xff'"),
        (b"schema == 1", "is not TOML: Invalid value (at line 1, column 9)"),
        (b"schema = 1\nschema = 1\n", "is not TOML: Cannot overwrite a value (at line 2, column 11)"),
        (b"\x00", "is not TOML:"),
        (b"schema = " + b"9" * 6000, "is not TOML: Exceeds the limit (4300"),
        (b"a = " + b"[" * 5000 + b"]" * 5000, "line 1 has 10004 characters, more than 10000"),
        (b"a = " + b"[\n" * 30000 + b"]\n" * 30000, "is nested too deeply"),
        (b"a." * 6000 + b"a = 1", "line 1 has 12005 characters, more than 10000"),
        (b"a." * 4000 + b"a = 1", "must have the key schema"),
        (b"#" * 9 + b"\n" + b"# x\n" * 300_000, "has more than 1000000 bytes"),
        (b"schema = 1", "must have one of the tables arm, linkage, got none"),
        (b"\xef\xbb\xbfschema = 2", "schema: must be 1"),
    ],
)
def test_hostile_content(tmp_path: Path, content: bytes, message: str) -> None:
    file = tmp_path / "bad.poise.toml"
    file.write_bytes(content)
    with pytest.raises(PoiseFileError, match=re.escape(message)) as caught:
        guard.load(file)
    assert str(caught.value).startswith(f"{file}: ")
    assert len(str(caught.value)) < 400 + len(str(file))


def test_a_folder_a_pipe_and_nothing(tmp_path: Path) -> None:
    with pytest.raises(PoiseFileError, match=re.escape(f"{tmp_path}: is a folder, not a file")):
        guard.load(tmp_path)
    pipe = tmp_path / "pipe.poise.toml"
    os.mkfifo(pipe)
    with pytest.raises(PoiseFileError, match=re.escape(f"{pipe}: is not a regular file")):
        guard.load(pipe)
    with pytest.raises(PoiseFileError, match=r"gone\.poise\.toml: cannot be read: No such file"):
        guard.load(tmp_path / "gone.poise.toml")
    with pytest.raises(PoiseFileError, match="cannot be read: embedded null"):
        guard.load("a\0b")
    with pytest.raises(InputTypeError, match="path must be the path of a file, got 3"):
        guard.load(3)  # type: ignore[arg-type]


def test_a_long_value_does_not_flood_the_message(written: Write) -> None:
    file = written(("ratio = 50", f'ratio = "{"x" * 5000}"'))
    with pytest.raises(PoiseFileError, match=re.escape("actuator.ratio: must be a number without quotes")) as caught:
        guard.load(file)
    assert len(str(caught.value)) < 300 + len(str(file))


def test_what_is_dumped_reads_back_as_the_same(written: Write, tmp_path: Path) -> None:
    document = guard.load(written())
    again = tmp_path / "again.poise.toml"
    again.write_text(guard.dump(document), encoding="utf-8")
    assert guard.load(again) == document
    assert guard.load(again).path != document.path


def test_a_dump_is_for_people(written: Write) -> None:
    text = guard.dump(guard.load(written()))
    assert text.startswith('schema = 1\ntitle = "lift"\n')
    assert 'rate = "0.245 N/mm"' in text
    assert 'from = "-60 deg"' in text
    assert 'first = {body = "ground", at = ["0 mm", "200 mm"]}' in text
    assert 'at_most = "3 %"' in text


def mechanism_with(spring: object) -> guard.PoiseFile:
    mount = SpringMount(spring, Straight(Point("ground", (0, 0.2)), Point("arm", (0.1, 0))))  # type: ignore[arg-type]
    return guard.PoiseFile(mechanism=Mechanism(Arm(Body(2.0, (0.3, 0))), springs=mount))


def test_what_files_do_not_know_is_not_written() -> None:
    class Band(ZeroLengthSpring):
        pass

    with pytest.raises(InputError, match="a Band cannot be written to a file, only these kinds of spring: extension, "):
        guard.dump(mechanism_with(ScaledSpring(Band(1.0), 2.0)))
    with pytest.raises(
        InputError, match=r"ZeroLengthSpring\.rate must be a single value to be written to a file, got nd"
    ):
        guard.dump(mechanism_with(ZeroLengthSpring(np.array([[1.0], [2.0]]))))

    class Crane(Arm):
        pass

    with pytest.raises(InputError, match="a Crane cannot be written to a file, only these linkages: arm"):
        guard.dump(guard.PoiseFile(mechanism=Mechanism(Crane(Body(2.0, (0.3, 0))))))


def test_a_saved_copy_keeps_comments_and_order(written: Write, tmp_path: Path, lift: str) -> None:
    document = guard.load(written())
    copy = tmp_path / "copy.poise.toml"
    guard.save(document, copy)
    assert copy.read_text(encoding="utf-8") == lift


def test_a_saved_change_keeps_the_rest(written: Write, tmp_path: Path, lift: str) -> None:
    document = guard.load(written())
    mount = document.mechanism.springs[0]
    stronger = document.mechanism.with_springs(attrs.evolve(mount, spring=ZeroLengthSpring(300.0)))
    copy = tmp_path / "copy.poise.toml"
    changed = attrs.evolve(document, mechanism=stronger)
    guard.save(changed, copy)
    assert copy.read_text(encoding="utf-8") == lift.replace('"0.245 N/mm"', '"0.3 N/mm"')
    assert guard.load(copy) == changed


def test_springs_that_go_and_come(written: Write, tmp_path: Path) -> None:
    document = guard.load(written(behind="\n# The last word.\n"))
    mount = document.mechanism.springs[0]
    others = [attrs.evolve(mount, name="left", count=1), attrs.evolve(mount, name="right", count=1)]
    copy = tmp_path / "copy.poise.toml"
    for springs in (others, [mount, *others], [], [others[1], mount]):
        changed = attrs.evolve(document, mechanism=document.mechanism.with_springs(springs))
        guard.save(changed, copy)
        assert guard.load(copy) == changed
        text = copy.read_text(encoding="utf-8")
        assert "# A comment at the top." in text
        assert "# The last word." in text
    guard.save(attrs.evolve(document, limits=(), payloads=(), actuator=None, title="", description="two\nlines"), copy)
    assert "limits" not in tomllib.loads(copy.read_text(encoding="utf-8"))
    assert guard.load(copy).description == "two\nlines"


def test_springs_in_a_list_on_one_line(written: Write, tmp_path: Path, lift: str) -> None:
    mount = lift[lift.index("[[springs]]") : lift.index("[[payloads]]")]
    inline = """springs = [ # two of them
    { name = "a", spring = { kind = "zero length", rate = "1 N/m" }, path = { kind = "straight", first = { body = "ground", at = ["0 m", "1 m"] }, last = { body = "arm", at = ["1 m", "0 m"] } } },
    { name = "b", spring = { kind = "zero length", rate = "2 N/m" }, path = { kind = "straight", first = { body = "ground", at = ["0 m", "1 m"] }, last = { body = "arm", at = ["1 m", "0 m"] } } },
]
"""
    document = guard.load(written((mount, ""), ("schema = 1\n", f"schema = 1\n{inline}")))
    a, b = document.mechanism.springs
    copy = tmp_path / "copy.poise.toml"
    for springs in ([b], [a, attrs.evolve(b, spring=ZeroLengthSpring(3.0))], [a, b, attrs.evolve(b, name="c")]):
        changed = attrs.evolve(document, mechanism=document.mechanism.with_springs(springs))
        guard.save(changed, copy)
        assert guard.load(copy) == changed


def test_a_document_made_in_code_is_saved_too(tmp_path: Path) -> None:
    document = mechanism_with(ZeroLengthSpring(1 / 3))
    guard.save(document, tmp_path / "made.poise.toml")
    assert guard.load(tmp_path / "made.poise.toml") == document


def test_a_failed_write_leaves_what_was_there(written: Write, monkeypatch: pytest.MonkeyPatch) -> None:
    file = written()
    before = file.read_bytes()
    document = attrs.evolve(guard.load(file), title="new")

    def full(*_: object) -> None:
        raise OSError(28, "No space left on device")

    for name in ("replace", "fsync"):
        with monkeypatch.context() as patch:
            patch.setattr(os, name, full)
            with pytest.raises(PoiseFileError, match=re.escape(f"{file}: cannot be written: No space left on device")):
                guard.save(document, file)
        assert file.read_bytes() == before
        assert [entry.name for entry in file.parent.iterdir()] == [file.name]


def test_where_nothing_can_be_written(written: Write, tmp_path: Path) -> None:
    document = guard.load(written())
    with pytest.raises(PoiseFileError, match=r"nowhere.*cannot be written: No such file"):
        guard.save(document, tmp_path / "nowhere" / "x.poise.toml")
    (tmp_path / "folder").mkdir()
    with pytest.raises(PoiseFileError, match="cannot be written: Is a directory"):
        guard.save(document, tmp_path / "folder")


def test_links_and_permissions_stay(written: Write, tmp_path: Path) -> None:
    file = written()
    file.chmod(0o640)
    link = tmp_path / "link.poise.toml"
    link.symlink_to(file)
    guard.save(attrs.evolve(guard.load(file), title="new"), link)
    assert link.is_symlink()
    assert stat.S_IMODE(file.stat().st_mode) == 0o640
    assert guard.load(file).title == "new"
    guard.save(guard.load(file), tmp_path / "fresh.poise.toml")
    mask = os.umask(0)
    os.umask(mask)
    assert stat.S_IMODE((tmp_path / "fresh.poise.toml").stat().st_mode) == 0o666 & ~mask


@pytest.mark.parametrize(
    ("field", "value", "message"),
    [
        ("mechanism", 3, "PoiseFile.mechanism must be a Mechanism, got 3"),
        ("title", None, "PoiseFile.title must be a str, got None"),
        ("actuator", "motor", "PoiseFile.actuator must be a Actuator, got 'motor'"),
        ("design", "stock", "PoiseFile.design must be a DesignRequest, got 'stock'"),
        ("limits", "all", "PoiseFile.limits must be a sequence of Limit, got 'all'"),
        ("payloads", [3], "PoiseFile.payloads must be a sequence of Payload, got (3,)"),
        ("open_springs", 4, "PoiseFile.open_springs must be a sequence of OpenSpring, got 4"),
    ],
)
def test_a_document_is_made_of_its_parts(written: Write, field: str, value: object, message: str) -> None:
    with pytest.raises(TypeError, match=re.escape(message)):
        attrs.evolve(guard.load(written()), **{field: value})
