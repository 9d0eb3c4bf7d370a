"""The commands: what they print, what they write, and how they refuse."""

from __future__ import annotations

import json
import os
import re
import subprocess
import sys
from pathlib import Path

import pytest

from mixind.cli import COMMANDS

QUICK = ["formulate", "--from", "5", "--to", "9", "--effort", "quick", "--most-dyes", "2", "--dose-tolerance", "0",
         "--dyes", "methyl red,bromothymol blue,thymol blue,bromocresol purple"]


def run(*arguments: str, folder: Path | None = None, stdin: str = "", **environment: str) -> subprocess.CompletedProcess[str]:
    """Run the program in a process of its own, as a user does."""
    variables = {**os.environ, "SOURCE_DATE_EPOCH": "1772323200", **environment}
    return subprocess.run([sys.executable, "-m", "mixind", *arguments], capture_output=True, text=True, cwd=folder,
                          env=variables, input=stdin, timeout=120)


def refused(done: subprocess.CompletedProcess[str], message: str, status: int = 2) -> None:
    """Check for one line on stderr, nothing on stdout, and the exit status."""
    assert done.returncode == status, done.stderr
    assert re.search(message, done.stderr), done.stderr
    assert done.stderr.count("\n") == 1
    assert "Traceback" not in done.stderr
    assert done.stdout == ""


def test_formulate_prints_saves_and_draws(tmp_path: Path) -> None:
    done = run(*QUICK, "--save", "my.toml", "--chart", "my.pdf", folder=tmp_path)
    assert done.returncode == 0, done.stderr
    for part in ("% w/v", "mg/L pure dye", "0.2 mL in 10 mL", "4 drops", "L*", "#", "Worst pair: pH", "side by side",
                 "printed chart", "How far to trust it", "not modelled", "hazards of", "safety data sheet", "seed 1"):
        assert part in done.stdout, part
    assert (tmp_path / "my.pdf").read_bytes().startswith(b"%PDF")
    again = run("predict", "my.toml", "--ph", "5:9", "--json", folder=tmp_path)
    found = json.loads(again.stdout)
    worst = float(re.search(r"separation ([\d.]+)", done.stdout)[1])  # type: ignore[index]
    matrix = found["separation"]
    assert min(matrix[i][j] for i in range(5) for j in range(i)) == pytest.approx(worst, abs=0.06)
    assert found["remarks"] == []


def test_formulate_json_has_the_documented_keys(tmp_path: Path) -> None:
    done = run(*QUICK, "--json", "--eyes", "normal", "--eyes", "deutan", "--light", "A", folder=tmp_path)
    assert done.returncode == 0
    found = json.loads(done.stdout)
    assert {"mixind", "blend", "separation", "rows", "search"} <= set(found)
    assert set(found["separation"]["by_viewer"]) == {"A/2/normal", "A/2/deutan"}
    assert found["separation"]["worst"] == pytest.approx(min(found["separation"]["by_viewer"].values()), abs=1e-3)
    component = found["blend"]["components"][0]
    assert {"dye", "strength_mg_per_L", "strength_umol_per_L"} <= set(component)
    assert {"seed", "starts", "seconds"} <= set(found["search"])


def test_the_same_seed_gives_the_same_file(tmp_path: Path) -> None:
    for name in ("a.toml", "b.toml"):
        assert run(*QUICK, "--save", name, folder=tmp_path).returncode == 0
    assert (tmp_path / "a.toml").read_bytes() == (tmp_path / "b.toml").read_bytes()


def test_no_answer_is_printed_saved_and_titled_so(tmp_path: Path) -> None:
    done = run("formulate", "--from", "9", "--to", "12", "--dyes", "methyl red", "--effort", "quick", "--save", "x.toml", folder=tmp_path)
    assert done.returncode == 1
    assert "not told apart" in done.stderr
    assert "NOT told apart" in done.stdout
    assert "best effort" in (tmp_path / "x.toml").read_text()


def test_predict_prints_and_gives_json(blend_file: Path, tmp_path: Path) -> None:
    done = run("predict", str(blend_file), "--ph", "4:8:0.5", "--vessel", "on-white", "--path", "16 mm")
    assert done.returncode == 0
    assert "on-white vessel, 1.6 cm" in done.stdout
    assert len(re.findall(r"#[0-9a-f]{6}", done.stdout)) == 9
    found = json.loads(run("predict", str(blend_file), "--json", "--ph", "7").stdout)
    assert found["separation"] == [[0.0]]
    assert found["rows"][0]["pH"] == 7.0


def test_predict_reads_standard_input(blend_file: Path) -> None:
    done = run("predict", "-", "--json", stdin=blend_file.read_text())
    assert json.loads(done.stdout)["blend"]["title"] == "test"
    refused(run("predict", "-", stdin="a = "), "standard input|-: is not valid TOML")


def test_other_conditions_than_the_blend_states_are_remarked(tmp_path: Path, blend_file: Path) -> None:
    with blend_file.open("a") as stream:
        stream.write('[conditions]\nlight = "A"\n')
    done = run("predict", str(blend_file), "--light", "D65")
    assert "the blend was made for light A, shown is D65" in done.stderr
    assert "A, 2 degree observer" in run("predict", str(blend_file)).stdout


@pytest.mark.parametrize("suffix", ["pdf", "svg", "png"])
def test_chart_writes_each_format(tmp_path: Path, blend_file: Path, suffix: str) -> None:
    out = tmp_path / f"my chart.{suffix}"
    done = run("chart", str(blend_file), str(out), "--date", "2026-03-01", "--paper", "letter")
    assert done.returncode == 0, done.stderr
    assert out.stat().st_size > 2000


def test_dye_list_show_and_check(tmp_path: Path, dye_text: str) -> None:
    listed = run("dye", "list").stdout
    for name in ("methyl red", "bromothymol blue", "(7.06)"):
        assert name in listed
    shown = run("dye", "show", "BTB").stdout
    for part in ("bromothymol blue", "pKa HIn-/In2-", "616 nm", "grade", "[", "hazard", "safety data sheet"):
        assert part in shown
    assert "[memory]" in run("dye", "show", "bromocresol green").stdout
    file = tmp_path / "dye.toml"
    file.write_text(dye_text)
    assert "no fault found" in run("dye", "check", str(file)).stdout
    file.write_text(dye_text.replace("pka = 4.90", "pka = 49"))
    refused(run("dye", "check", str(file)), "pka: is 49")
    assert json.loads(run("dye", "list", "--json").stdout)["dyes"]
    assert json.loads(run("dye", "show", "BTB", "--json").stdout)["name"] == "bromothymol blue"


BAD_FORMULATE = {
    "unknown dye": (["--with", "metyl red"], "did you mean methyl red"),
    "span reversed": (["--from", "9", "--to", "4"], "lower pH first"),
    "span outside": (["--to", "16"], "reaches outside -1 to 15"),
    "step zero": (["--step", "0"], "finer than 0.05"),
    "step too fine": (["--step", "0.01"], "finer than 0.05"),
    "step that does not fit": (["--to", "6.3"], "does not fit"),
    "more demanded than allowed": (["--with", "BTB", "--with", "methyl red", "--most-dyes", "1"], "2 dyes are demanded"),
    "with and without": (["--with", "BTB", "--without", "bromothymol blue"], "with and without"),
    "folder missing": (["--save", "no/my.toml"], "does not exist"),
    "output exists": (["--save", "there.toml"], "exists already"),
    "unknown suffix": (["--chart", "my.gif"], "cannot be drawn as .gif"),
    "one file for both": (["--chart", "my.svg", "--save", "my.svg"], "both name"),
    "bad dose": (["--dose", "4 drops"], "dose"),
    "bad tolerance": (["--dose-tolerance", "100%"], "dose tolerance"),
    "bad darkest": (["--darkest", "95"], "darkest"),
    "bad peak": (["--peak-absorbance", "0"], "peak-absorbance"),
    "bad threshold": (["--threshold", "-1"], "threshold"),
    "metric without threshold": (["--metric", "cam16-ucs"], "Give --threshold"),
    "unknown lamp": (["--light", "D66"], "did you mean"),
    "bad path": (["--path", "1"], "unit is missing"),
    "bad date": (["--chart", "my.svg", "--date", "soon"], "not a date"),
    "library missing": (["--library", "nowhere"], "not a folder"),
    "wrong option": (["--frm", "4"], "No such option"),
    "not a number": (["--step", "x"], "not a valid float"),
    "negative temperature": (["--temperature", "-5"], "temperature"),
}


@pytest.mark.parametrize(("options", "message"), BAD_FORMULATE.values(), ids=list(BAD_FORMULATE))
def test_formulate_refuses_in_one_line_and_writes_nothing(tmp_path: Path, options: list[str], message: str) -> None:
    (tmp_path / "there.toml").write_text("old")
    span = [word for flag, value in (("--from", "4"), ("--to", "6")) if flag not in options for word in (flag, value)]
    refused(run("formulate", *span, "--effort", "quick", "--dyes", "BTB,methyl red", *options, folder=tmp_path), message)
    assert os.listdir(tmp_path) == ["there.toml"]
    assert (tmp_path / "there.toml").read_text() == "old"


BAD_BLENDS = {
    "negative strength": ('[[component]]\ndye = "BTB"\nstrength = "-5 mg/L"', "negative"),
    "nan strength": ('[[component]]\ndye = "BTB"\nstrength = "nan mg/L"', "not a number"),
    "unit missing": ('[[component]]\ndye = "BTB"\nstrength = "5"', "unit is missing"),
    "wrong TOML": ("[[component", "not valid TOML"),
    "wrong key": ('[[component]]\ndye = "BTB"\nstrenght = "5 mg/L"', "strenght: is not a key"),
    "no component": ('title = "x"', "component: is missing"),
    "dye twice": ('[[component]]\ndye = "BTB"\nstrength = "5 mg/L"\n' * 2, "stands 2 times"),
    "unknown dye": ('[[component]]\ndye = "BTBB"\nstrength = "5 mg/L"', "did you mean BTB"),
}


@pytest.mark.parametrize(("text", "message"), BAD_BLENDS.values(), ids=list(BAD_BLENDS))
@pytest.mark.parametrize("command", ["predict", "chart"])
def test_bad_blends_are_refused(tmp_path: Path, command: str, text: str, message: str) -> None:
    (tmp_path / "b.toml").write_text(text)
    out = ["out.pdf"] if command == "chart" else []
    refused(run(command, "b.toml", *out, folder=tmp_path), message)
    assert os.listdir(tmp_path) == ["b.toml"]


def test_bad_pH_missing_file_and_existing_chart(tmp_path: Path, blend_file: Path) -> None:
    refused(run("predict", str(blend_file), "--ph", "10:4"), "lower pH first")
    refused(run("predict", str(tmp_path / "none.toml")), "cannot be read")
    refused(run("predict", str(tmp_path)), "cannot be read")
    old = tmp_path / "old.pdf"
    old.write_text("old")
    refused(run("chart", str(blend_file), str(old)), "exists already")
    assert old.read_text() == "old"
    assert run("chart", str(blend_file), str(old), "--replace").returncode == 0
    refused(run("chart", str(blend_file), str(tmp_path / "new.bmp")), "cannot be drawn")
    refused(run("nonsense"), "No such command")


@pytest.mark.parametrize("command", [[], *([name] for name in COMMANDS), ["dye", "list"], ["dye", "show"], ["dye", "check"]])
def test_every_command_has_help_with_an_example(command: list[str]) -> None:
    done = run(*command, "--help")
    assert done.returncode == 0
    assert "Example: mixind" in done.stdout


def test_a_closed_pipe_ends_quietly() -> None:
    code = f"{sys.executable} -m mixind dye list | head -n 1; echo ${{PIPESTATUS[0]}}"
    done = subprocess.run(["bash", "-c", code], capture_output=True, text=True, timeout=60)
    assert done.stdout.splitlines()[-1] == "0"
    assert "Traceback" not in done.stderr
    assert "Broken" not in done.stderr


def test_no_color_and_pipes_get_no_escapes(blend_file: Path) -> None:
    assert "\x1b" not in run("predict", str(blend_file), COLORTERM="truecolor").stdout


@pytest.mark.skipif(sys.platform == "win32", reason="needs a pseudo-terminal")
def test_a_colour_terminal_gets_swatches_unless_told_not_to(blend_file: Path) -> None:
    import pty

    seen = {}
    for no_color in ("", "1"):
        master, slave = pty.openpty()
        variables = {**os.environ, "COLORTERM": "truecolor", "NO_COLOR": no_color}
        child = subprocess.Popen([sys.executable, "-m", "mixind", "predict", str(blend_file)], stdout=slave, stderr=slave,
                                 env=variables)
        os.close(slave)
        chunks = []
        while True:
            try:
                chunk = os.read(master, 4096)
            except OSError:
                break
            if not chunk:
                break
            chunks.append(chunk)
        child.wait(timeout=60)
        os.close(master)
        seen[no_color] = b"".join(chunks)
    assert b"\x1b[48;2;" in seen[""]
    assert b"\x1b[48;2;" not in seen["1"]


def loaded_by(*arguments: str) -> set[str]:
    """Return the top-level packages that a command imports."""
    code = ("import sys; from mixind.cli import main\ntry:\n    main(sys.argv[1:])\nexcept SystemExit:\n    pass\n"
            "print('|'.join(sys.modules), file=sys.stderr)")
    done = subprocess.run([sys.executable, "-c", code, *arguments], capture_output=True, text=True, timeout=60)
    return {name.split(".")[0] for name in done.stderr.splitlines()[-1].split("|")}


def test_commands_import_only_what_they_use(blend_file: Path, tmp_path: Path) -> None:
    heavy = {"numpy", "scipy", "matplotlib", "colour", "PIL"}
    assert loaded_by("--help") & heavy == set()
    assert loaded_by("predict", str(blend_file)) & heavy == {"numpy"}
    assert loaded_by("dye", "show", "m-cresol purple") & heavy == {"numpy"}
    assert loaded_by(*QUICK) & heavy == {"numpy", "scipy"}
    assert "scipy" not in loaded_by("chart", str(blend_file), str(tmp_path / "c.svg"))
