"""What the command-line tests share: running kfeed in a folder of its own, and small drawings. mm."""
import os
import pathlib
import shutil
import subprocess
import sys
import tempfile
import unittest

TOP = pathlib.Path(os.environ.get("KF_SOURCE_DIR", pathlib.Path(__file__).resolve().parents[2]))
BIN = pathlib.Path(os.environ.get("KF_BIN", TOP / ".build/release/bin"))
SAMPLES = TOP / "samples"
ROUTER = SAMPLES / "limits/example-router.json"
sys.path.insert(0, str(TOP / "tests/support"))


class Run:
    def __init__(self, done):
        self.code, self.out, self.err = done.returncode, done.stdout.decode(), done.stderr.decode()


def kfeed(*arguments, stdin=b"", environment=None, stdout=subprocess.PIPE, timeout=120):
    done = subprocess.run([BIN / "kfeed", *map(str, arguments)], input=stdin, stdout=stdout, stderr=subprocess.PIPE,
                          timeout=timeout, env={**os.environ, **(environment or {})}, check=False)
    if done.stdout is None:
        done.stdout = b""
    return Run(done)


class InAFolder(unittest.TestCase):
    def setUp(self):
        self.folder = pathlib.Path(tempfile.mkdtemp(prefix="kf-cli-"))
        self.addCleanup(shutil.rmtree, self.folder)

    def names(self):
        return sorted(p.name for p in self.folder.iterdir())

    def file(self, name, content):
        path = self.folder / name
        path.write_bytes(content if isinstance(content, bytes) else content.encode())
        return path

    def refused(self, run, code, *parts):
        """One sentence on stderr, nothing on stdout, and the code of the contract."""
        self.assertEqual(run.code, code, run.err)
        self.assertEqual(run.out, "")
        last = run.err.strip().splitlines()[-1]
        self.assertTrue(last.startswith("kfeed: "), run.err)
        self.assertNotIn("terminate", run.err)
        for part in parts:
            self.assertIn(part, last)
