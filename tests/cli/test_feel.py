"""``armeval feel`` and its demo, as typed."""

from __future__ import annotations

import json


def _hand(starter, text='[hand]\nrendered_force = "1 N"\n'):
    starter.write_text(
        starter.read_text(encoding="utf-8").replace("\n[[run]]", f"\n{text}\n[[run]]", 1), encoding="utf-8"
    )


def test_feel_prints_a_table_to_act_on(armeval, starter):
    _hand(starter)
    said = armeval("feel", starter, "--members", "8")
    assert said.code == 0
    for piece in (
        "lift",
        "84",
        "compensation takes",
        "index error",
        "find the encoders' index more exactly",
        "Colgate",
    ):
        assert piece in said.out
    assert "no safety assessment" in said.err
    assert "not imperceptible" in said.err


def test_json_is_one_document_and_out_writes_every_table(armeval, starter, tmp_path):
    _hand(starter)
    out = tmp_path / "feel"
    said = armeval("feel", starter, "--members", "8", "--json", "--workspace", "--spacing", "60", "--out", out)
    assert said.code == 0
    document = json.loads(said.out)
    assert document == json.loads((out / "feel.json").read_text(encoding="utf-8"))
    assert document["workspace"]["spacing_m"] == 0.06
    tables = {file.name for file in out.glob("*.csv")}
    assert tables == {"feel.csv", "lines.csv", "along.csv", "abilities.csv", "workspace.csv"}
    pictures = {file.name for file in out.glob("*.png")}
    assert pictures == {"force.png", "direction.png", "spectrum.png", "workspace.png"}


def test_a_hand_that_is_wrong_is_told_with_the_way_out(armeval, starter):
    _hand(starter, "[hand]\nrendered_force = 1\n")
    said = armeval("feel", starter)
    assert said.code == 2
    assert "rendered_force" in said.out + said.err


def test_the_feel_demo_writes_its_trial_and_prints_what_the_hand_meets(armeval, tmp_path):
    said = armeval("demo", tmp_path / "led", "--trial", "feel")
    assert said.code == 0
    assert "run led, lap 1" in said.out
    assert (tmp_path / "led" / "tern" / "arm.toml").is_file()
    assert (tmp_path / "led" / "NOTES.md").is_file()
    assert armeval("check", tmp_path / "led" / "trial.toml").code == 0


def test_a_demo_that_is_not_there_is_told(armeval, tmp_path):
    said = armeval("demo", tmp_path / "led", "--trial", "fell")
    assert said.code == 2
    assert "feel" in said.out + said.err


def test_an_arm_without_limits_and_rotors_gives_what_can_be_had_and_says_what_cannot(armeval, starter):
    arm = starter.parent / "tern" / "arm.toml"
    kept = [
        line for line in arm.read_text(encoding="utf-8").splitlines() if not line.startswith(("torque_limit", "rotor"))
    ]
    arm.write_text("\n".join(kept) + "\n", encoding="utf-8")
    _hand(starter)
    said = armeval("feel", starter, "--members", "8", "--json")
    assert said.code == 0
    assert "no joint has a `torque_limit`" in said.err
    assert "no joint has a `rotor_inertia`" in said.err
    figures = {entry["figure"]: entry["median"] for entry in said.document["abilities"]}
    assert figures["continuous_force_N"] is None
    assert figures["mass_most_kg"] > 0.0
    assert said.document["states"][0]["ripple"]["rms_N"] > 0.0
