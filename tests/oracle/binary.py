"""The program `records`: a project in, answer and branches (with `--sheet`: answer with sheet) out, one line of JSON each."""

import json
import select
import subprocess

#: Seconds after which one project counts as hanging.
PATIENCE = 30


class NoAnswer(RuntimeError):
    """The program ended or hung."""


class Records:
    """A running program; it is started anew after it ended or hung."""

    def __init__(self, path, *arguments):
        self.command = [path, *arguments]
        self.process = None

    def ask(self, project_text):
        """The answer to a project: `{"answer": …, "branches": […]}`."""
        if self.process is None or self.process.poll() is not None:
            self.process = subprocess.Popen(
                self.command, stdin=subprocess.PIPE, stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True, encoding="utf-8"
            )
        try:
            self.process.stdin.write(project_text + "\n")
            self.process.stdin.flush()
        except BrokenPipeError:
            self.stop("it had ended")
        ready, _, _ = select.select([self.process.stdout], [], [], PATIENCE)
        if not ready:
            self.stop(f"no answer in {PATIENCE} s")
        line = self.process.stdout.readline()
        if not line:
            self.stop("it ended")
        return json.loads(line)

    def stop(self, reason):
        """Ends the program and says why, with what it wrote to its error stream."""
        self.process.kill()
        _, complaint = self.process.communicate()
        self.process = None
        raise NoAnswer(f"{reason}; {complaint[-800:]}")
