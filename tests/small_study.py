"""A small study of our own for tests of the whole line: three mixes of a floor screed, two families in series."""

from pathlib import Path

SPEC = """\
beforehand: 1
study:
  title: Three mixes of a floor screed
  identifier: SC-2032-01
  intent: confirmatory
  dated: 2032-02-01
data:
  - id: slabs
    file: slabs.csv
    one_row_is: one slab of one mix
    identified_by: [slab]
    allocated: {by: mix, how: randomised}
    columns:
      slab: {kind: text}
      mix: {kind: category, levels: [plain, fibre, foam]}
      strength: {kind: number, unit: MPa, between: [0, 90]}
      shrinkage: {kind: number, unit: mm/m}
      cracked: {kind: category, levels: ["yes", "no"]}
    exclude:
      - {where: strength < 5, because: broken in transport, known_at: before_allocation}
promise:
  criterion: familywise_error_rate
  level: 0.05
  level_is: two_sided
  across_families: serial
  order: [strength, second]
families:
  - id: strength
    question: Is either new mix stronger than the plain one?
    procedure: holm
    comparisons:
      test: welch_t
      outcome: strength
      groups: mix
      pairs: {each_with: plain}
      alternative: above
      claim: "{group} screed is stronger than plain screed"
  - id: second
    question: Shrinkage and cracks
    procedure: bonferroni
    hypotheses:
      - id: shrinkage_fibre
        test: student_t
        outcome: shrinkage
        groups: {column: mix, first: fibre, second: plain}
        alternative: two_sided
        claim_direction: below
      - id: cracks_fibre
        test: fisher_exact
        outcome: {column: cracked, values: ["yes"]}
        groups: {column: mix, first: fibre, second: plain}
        alternative: below
"""

MIXES = (("plain", 31.0, 0.62), ("fibre", 37.0, 0.48), ("foam", 35.0, 0.60))


def rows() -> list[str]:
    """Give the lines of the data file; the scatter is a fixed sawtooth, not chance."""
    lines = ["slab,mix,strength,shrinkage,cracked"]
    for number in range(48):
        mix, strength, shrinkage = MIXES[number % 3]
        wobble = (number * 7 % 11 - 5) * 0.7
        cracked = "yes" if (number * 5 % 12) < (4 if mix != "fibre" else 1) else "no"
        lines.append(f"S{number:02d},{mix},{strength + wobble:.1f},{shrinkage + wobble / 60:.3f},{cracked}")
    lines[7] = "S06,plain,2.0,0.600,no"
    lines[11] = "S10,fibre,,0.470,no"
    return lines


def write_study(folder: Path, *, spec: str = SPEC, lines: list[str] | None = None) -> Path:
    """Write spec and data into a folder, and give the spec's path."""
    folder.mkdir(parents=True, exist_ok=True)
    (folder / "slabs.csv").write_text("\n".join(lines or rows()) + "\n", "utf-8")
    path = folder / "screed.yaml"
    path.write_text(spec, "utf-8")
    return path
