#!/bin/sh
# `foundleft begin` killed (SIGKILL) between readings, and while it takes one; `foundleft resume` asks for what comes
# next and the session ends as if nothing had happened. Two programs on one journal: the second is refused.
# SPDX-License-Identifier: GPL-3.0-or-later
set -eu
. "$(dirname "$0")/common.sh"
trap 'rm -rf "$work"' EXIT
# The sample stock, in date for as long as this test will run.
mkdir -p "$work/home/stock"
cp "$stock"/*.yaml "$work/home/stock"
sed -i 's/^\( *\)\(use before\|due on\): 202[67]-/\1\2: 2150-/' "$work/home/stock/oils.yaml" "$work/home/stock/equipment.yaml"
python3 - "$program" "$work/home" "$answers" <<'PY'
import json
import subprocess
import sys

program, home, path = sys.argv[1:]
answers = []
for line in open(path, encoding="utf-8"):
    line = line.strip()
    if line == "!empty":
        answers.append("")
    elif line and line[0] not in "!#":
        answers.append(line)


def fail(what):
    sys.exit(f"killed: {what}")


class Talk:
    """The program at a pipe: what it says up to the next question, what is typed."""

    def __init__(self, *arguments):
        self.process = subprocess.Popen([program, *arguments, "--home", home], stdin=subprocess.PIPE,
                                        stdout=subprocess.PIPE, stderr=subprocess.PIPE)
        self.said = self.listen()

    def listen(self):
        """Until a question is asked: it ends in "> " without a newline. Empty at the end."""
        said = b""
        while not said.endswith(b"> "):
            part = self.process.stdout.read1(65536)
            if not part:
                break
            said += part
        return said.decode("utf-8")

    def type(self, line):
        self.process.stdin.write(line.encode("utf-8") + b"\n")
        self.process.stdin.flush()

    def answer(self, line):
        self.type(line)
        self.said = self.listen()
        if "not taken" in self.said:
            fail(f"`{line}` was not taken: {self.said}")

    def kill(self):
        self.process.kill()
        if self.process.wait() != -9:
            fail("it was not killed")
        for pipe in (self.process.stdin, self.process.stdout, self.process.stderr):
            try:
                pipe.close()
            except BrokenPipeError:
                pass

    def end(self):
        self.process.stdin.close()
        error = self.process.stderr.read().decode("utf-8")
        return self.process.wait(), error


def begin(journal):
    return Talk("begin", "--journal", journal, "--procedure", "workshop-calibration", "--instrument", "VT-1")


def lines(journal):
    with open(journal, "rb") as file:
        return file.read().count(b"\n")


def figures(journal):
    """What the readings give; times, digests and the paths may differ."""
    out = subprocess.run([program, "assess", journal, "--json", "--home", home], check=True, capture_output=True)
    result = json.loads(out.stdout)
    for run in result["runs"]:
        for reading in run["readings"]:
            del reading["sequence"], reading["taken_at"]
    return json.dumps([result["runs"], result["session"]["remarks"], result["session"]["closed"]])


def question(said):
    return said.rsplit("\n", 1)[-1]


# Undisturbed: what is asked and how long the journal is before each answer.
whole = f"{home}/whole.flj"
talk = begin(whole)
asked, length = [], []
for line in answers:
    asked.append(question(talk.said))
    length.append(lines(whole))
    talk.answer(line)
code, error = talk.end()
length.append(lines(whole))
if code or error or "The session is closed" not in talk.said:
    fail(f"the undisturbed session ended with {code}: {error} {talk.said}")
want = figures(whole)


def next_answer(journal):
    """Behind the last answer whose lines are all there."""
    found = lines(journal)
    torn = open(journal, "rb").read()[-1:] != b"\n"
    done = [n for n in range(1, len(answers) + 1) if length[n] <= found and length[n] > length[n - 1]]
    return (done[-1] if done else 0), torn


def resume_and_finish(journal, what):
    n, torn = next_answer(journal)
    again = Talk("resume", journal)
    if question(again.said) != asked[n]:
        fail(f"{what}: asks {question(again.said)!r}, want {asked[n]!r}")
    for line in answers[n:]:
        again.answer(line)
    code, error = again.end()
    if code or error or "The session is closed" not in again.said:
        fail(f"{what}: ended with {code}: {error} {again.said}")
    if figures(journal) != want:
        fail(f"{what}: the figures are not those of the undisturbed session")


# Killed at a question: everything answered is there.
points = list(range(1, len(answers), 19)) + [2, 14, 130, 131, 132, 136, 137, len(answers) - 1]
for n in points:
    journal = f"{home}/between-{n}.flj"
    talk = begin(journal)
    for line in answers[:n]:
        talk.answer(line)
    talk.kill()
    if lines(journal) != length[n]:
        fail(f"killed after answer {n}: {lines(journal)} lines, want {length[n]}")
    resume_and_finish(journal, f"killed after answer {n}")

# Killed while many answers are on their way: wherever that hits.
hit = set()
for n in range(5, len(answers) - 5, 23):
    journal = f"{home}/within-{n}.flj"
    talk = begin(journal)
    for line in answers[:n]:
        talk.answer(line)
    talk.type("\n".join(answers[n:]))
    talk.process.stdout.read1(1)
    talk.kill()
    at, torn = next_answer(journal)
    hit.add(at)
    if lines(journal) < length[n]:
        fail(f"killed within answer {n}: {lines(journal)} lines, want at least {length[n]}")
    if at < len(answers):
        resume_and_finish(journal, f"killed within answer {n}")
if len(hit) < 5:
    fail(f"the kills hit only {hit}")

# Two programs on one journal.
journal = f"{home}/two.flj"
talk = begin(journal)
for line in answers[:40]:
    talk.answer(line)
for command in (("resume", journal), ("begin", "--journal", journal, "--procedure", "workshop-calibration",
                                      "--instrument", "VT-1")):
    second = subprocess.run([program, *command, "--home", home], input=b"", capture_output=True)
    said = second.stderr.decode("utf-8")
    if second.returncode != 5 or said.count("\n") != 1:
        fail(f"a second {command[0]} ended with {second.returncode}: {said}")
    if command[0] == "resume" and "another program has it open" not in said:
        fail(f"a second program is told: {said}")
if lines(journal) != length[40]:
    fail("the second program wrote")
for line in answers[40:]:
    talk.answer(line)
code, error = talk.end()
if code or figures(journal) != want:
    fail(f"the first program was disturbed: {code} {error}")
print(f"killed: {len(points)} times at a question, {len(hit)} places within, two programs on one journal")
PY
