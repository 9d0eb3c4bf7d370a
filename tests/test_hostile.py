"""Bad days: what a hunt for faults once broke stays mended."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

import pytest

from mixind.dye_files import read_dye
from mixind.errors import MixindError
from mixind.library import Library
from mixind.search.candidates import choose
from tests.test_cli import QUICK, refused, run

SOUND = '[[component]]\ndye = "methyl red"\nstrength = "60 mg/L"\n'

REFUSED = {
    "negative seed": (["--seed", "-1"], "seed|--seed"),
    "blank dyes": (["--dyes", " , "], "names no dye"),
    "blank save": (["--save", ""], "blank"),
    "blank chart": (["--chart", ""], "cannot be drawn"),
    "long name": (["--save", "x" * 300], "too long a name"),
    "link to itself": (["--save", "loop", "--replace"], "not a file that can be replaced"),
    "device": (["--save", "/dev/null", "--replace"], "not a file that can be replaced"),
    "date without chart": (["--date", "junk"], "not a date"),
    "too many rungs": (["--step", "0.05", "--chart", "c.pdf", "--save", "s.toml"], "2 to 25"),
    "date with chart": (["--date", "", "--chart", "c.pdf", "--save", "s.toml"], "not a date"),
    "infinite threshold": (["--threshold", "inf"], "finite"),
    "tiny dose": (["--dose", "1e-320 mL in 10 mL"], "outside 0.0001"),
    "huge dose": (["--dose", "1e308 mL in 1e308 mL"], "outside 0.0001"),
    "tiny path": (["--path", "1e-320 m"], "outside 0.01"),
    "no absorbance": (["--peak-absorbance", "1e-9"], "outside 0.05"),
    "long library": (["--library", "x" * 5000], "not a folder"),
}


@pytest.mark.parametrize(("options", "message"), REFUSED.values(), ids=list(REFUSED))
def test_formulate_refuses(tmp_path: Path, options: list[str], message: str) -> None:
    (tmp_path / "loop").symlink_to("loop")
    refused(run(*QUICK, *options, folder=tmp_path), message)
    assert os.listdir(tmp_path) == ["loop"]


BLENDS = {
    "strength without end": (SOUND.replace("60 mg/L", "1e308 M"), "more than 10 mol/L"),
    "long integer": (SOUND + "[conditions]\ntemperature = " + "9" * 401, "temperature: is a very large number"),
    "deep key": ("title" + ".a" * 400 + " = 1\n" + SOUND, "title: must be text in quotes, got a table"),
    "control characters": ('title = "a\\u001b[31mred"\n' + SOUND, "control character"),
    "content of nothing": (SOUND + 'content = "0 %"\n', "content"),
    "span": ('ph = "10:4"\n' + SOUND, "lower pH first"),
}


@pytest.mark.parametrize(("text", "message"), BLENDS.values(), ids=list(BLENDS))
def test_blends_are_refused(tmp_path: Path, text: str, message: str) -> None:
    (tmp_path / "b.toml").write_text(text)
    refused(run("predict", "b.toml", folder=tmp_path), message)


@pytest.mark.parametrize(("old", "new", "message"), [
    ('kind = "thermodynamic"', 'kind = "mixd"', "kind: 'mixd' is not one of"), ("charge = -2", "charge = -2.4", "not a whole number"),
    ("molar_mass = 698.01", "molar_mass = " + "9" * 401, "very large number")])
def test_dye_files_are_refused(tmp_path: Path, dye_text: str, old: str, new: str, message: str) -> None:
    (tmp_path / "d.toml").write_text(dye_text.replace(old, new))
    with pytest.raises(MixindError, match=message):
        read_dye(tmp_path / "d.toml")


def test_many_steps_are_refused(tmp_path: Path, dye_text: str) -> None:
    step = '[[step]]\npka = 5\nsd = 0.1\nkind = "mixed"\nionic_strength = 0.1\nsource = "memory"\n'
    (tmp_path / "d.toml").write_text(dye_text.replace("[[step]]", step * 150 + "[[step]]", 1))
    with pytest.raises(MixindError, match="2 forms for 151 steps"):
        read_dye(tmp_path / "d.toml")


def test_a_file_must_be_named_after_its_dye(tmp_path: Path, dye_text: str) -> None:
    (tmp_path / "my_green.toml").write_text(dye_text)
    with pytest.raises(MixindError, match=r"Name the file bromocresol_green\.toml"):
        Library([tmp_path]).all()
    (tmp_path / "my_green.toml").rename(tmp_path / "Bromocresol Green.toml")
    assert Library([tmp_path]).find("bromocresol green").name == "bromocresol green"


def test_many_cationic_dyes_make_no_explosion(tmp_path: Path) -> None:
    text = (Path(__file__).parent.parent / "dye_library" / "crystal_violet.toml").read_text()
    for number in range(30):
        name = text.replace('name = "crystal violet"', f'name = "violet {number}"')
        lines = [line for line in name.splitlines() if not line.startswith("aliases")]
        (tmp_path / f"violet_{number}.toml").write_text("\n".join(lines))
    families = choose(Library([tmp_path])).families()
    assert 0 < len(families) < 20


def test_a_link_is_followed_and_not_replaced(tmp_path: Path) -> None:
    (tmp_path / "real.toml").write_text("old")
    (tmp_path / "link.toml").symlink_to("real.toml")
    assert run(*QUICK, "--save", "link.toml", "--replace", folder=tmp_path).returncode == 0
    assert (tmp_path / "link.toml").is_symlink()
    assert "component" in (tmp_path / "real.toml").read_text()


@pytest.mark.parametrize("step", ["0.333333", "0.6666667", "0.12"])
def test_a_saved_span_is_read_again(tmp_path: Path, step: str) -> None:
    """A step of a third was once saved with two decimals, which do not fit the span."""
    job = ("formulate", "--from", "6", "--to", "8", "--step", step, "--dyes", "methyl red,BTB,phenol red", "--effort", "quick",
           "--threshold", "0.01", "--dose-tolerance", "0", "--save", "a.toml")
    found = run(*job, folder=tmp_path)
    again = run("predict", "a.toml", folder=tmp_path)
    assert again.returncode == 0, again.stderr
    rows = [line for line in again.stdout.splitlines() if "#" in line]
    assert rows
    assert all(row in found.stdout for row in rows)


def test_a_blank_span_is_refused(blend_file: Path) -> None:
    refused(run("predict", str(blend_file), "--ph", ""), "pH: '' is not of the form")


def test_aged_solutions_stay_aged(tmp_path: Path) -> None:
    job = ("formulate", "--from", "11", "--to", "13", "--dyes", "phenolphthalein,thymolphthalein", "--aged", "--effort", "quick",
           "--dose-tolerance", "0", "--save", "a.toml")
    found = run(*job, folder=tmp_path)
    again = run("predict", "a.toml", folder=tmp_path)
    rows = [line for line in again.stdout.splitlines() if "#" in line]
    assert len(rows) == 3
    for row in rows:
        assert row in found.stdout


def test_content_says_what_to_weigh(tmp_path: Path) -> None:
    (tmp_path / "b.toml").write_text(SOUND + 'content = "80 %"\n')
    assert "methyl red: weigh 75.0 mg of the 80% powder" in run("predict", "b.toml", folder=tmp_path).stdout


def test_too_much_for_the_sample_is_said(tmp_path: Path) -> None:
    (tmp_path / "b.toml").write_text(SOUND.replace("methyl red", "thymolphthalein").replace("60 mg/L", "0.1 %"))
    assert "thymolphthalein: 45.5 umol/L in the sample" in run("predict", "b.toml", folder=tmp_path).stderr


def test_rungs_that_look_alike_are_said(tmp_path: Path, blend_file: Path) -> None:
    done = run("chart", str(blend_file), "c.svg", "--ph", "9:12", folder=tmp_path)
    assert "not told apart side by side: pH 9-10, 10-11, 11-12" in done.stderr


def test_ionic_strength_beyond_the_correction_is_said(blend_file: Path) -> None:
    assert "ionic strength 2 mol/L is beyond" in run("predict", str(blend_file), "--ionic-strength", "2").stderr


def shell(command: str, **environment: str) -> subprocess.CompletedProcess[str]:
    return subprocess.run(["bash", "-c", command.replace("mixind", f"{sys.executable} -m mixind", 1)], capture_output=True, text=True,
                          env={**os.environ, **environment}, timeout=60)


def test_closed_and_full_streams(blend_file: Path) -> None:
    done = shell("mixind predict - <&-")
    assert done.returncode == 2
    assert "Traceback" not in done.stderr
    assert shell(f"mixind predict {blend_file} >&-").returncode == 0
    full = shell(f"mixind predict {blend_file} > /dev/full")
    assert full.returncode == 2
    assert "cannot be written" in full.stderr
    assert "Traceback" not in full.stderr
    assert shell("mixind --help | true; exit ${PIPESTATUS[0]}").returncode == 0


def test_bare_program_prints_its_help() -> None:
    done = run()
    assert done.returncode in (0, 2)
    assert (done.stdout + done.stderr).count("\n") > 5


def test_a_chart_does_not_depend_on_the_users_settings(tmp_path: Path, blend_file: Path) -> None:
    settings = tmp_path / "settings"
    settings.mkdir()
    (settings / "matplotlibrc").write_text(
        "savefig.bbox: tight\nfont.family: serif\ntext.usetex: True\npdf.compression: 0\nsavefig.transparent: True\n")
    plain = run("chart", str(blend_file), str(tmp_path / "a.pdf"))
    odd = run("chart", str(blend_file), str(tmp_path / "b.pdf"), MPLCONFIGDIR=str(settings), MPLBACKEND="bogus")
    assert plain.returncode == odd.returncode == 0, odd.stderr
    assert (tmp_path / "a.pdf").read_bytes() == (tmp_path / "b.pdf").read_bytes()
    refused(run("chart", str(blend_file), str(tmp_path / "c.pdf"), SOURCE_DATE_EPOCH="abc"), "SOURCE_DATE_EPOCH")


def test_a_very_long_title_is_cut(tmp_path: Path, blend_file: Path) -> None:
    blend_file.write_text(blend_file.read_text().replace('"test"', '"' + "abc de " * 1500 + '"'))
    assert run("chart", str(blend_file), str(tmp_path / "a.svg")).returncode == 0


def test_many_dyes_fit_the_chart(tmp_path: Path, library: Library) -> None:
    text = "".join(f'[[component]]\ndye = "{dye.name}"\nstrength = "5 mg/L"\n' for dye in library.all())
    (tmp_path / "b.toml").write_text(text)
    from mixind import figures
    from mixind.blend import read_blend
    from mixind.conditions import Conditions
    from mixind.prediction import predict
    from mixind.quantities import pH_series

    figure = figures.draw_chart(predict(read_blend(tmp_path / "b.toml", library), pH_series("4:10"), Conditions()), date="2026-03-01")
    lines = {text.get_text(): text.get_position()[1] for text in figure.axes[0].texts}
    assert any("more: see the blend file" in line for line in lines)
    footer = next(y for line, y in lines.items() if line.startswith("mixind"))
    assert all(y >= footer + 3 for line, y in lines.items() if not line.startswith("mixind"))
