"""Outputs: whole or not at all, never over an old file unasked, the same bytes everywhere."""
import os
import pathlib
import subprocess

from driving import ROUTER, SAMPLES, InAFolder, kfeed

GASKET = SAMPLES / "gasket.dxf"
PLAN = ("plan", GASKET, "--limits", ROUTER, "--quiet", "--contour", "3")


class Files(InAFolder):
    def test_an_existing_file_is_replaced_only_with_force(self):
        old = self.file("a.csv", "old")
        self.refused(kfeed(*PLAN, "--points", old), 4, "--force")
        self.assertEqual(old.read_text(), "old")
        self.assertEqual(kfeed(*PLAN, "--points", old, "--force").code, 0)
        self.assertTrue(old.read_text().startswith("# kappafeed"))
        self.assertEqual(self.names(), ["a.csv"])

    def test_a_run_that_fails_leaves_old_files_as_they_were_and_no_new_ones(self):
        old = self.file("a.csv", "old")
        for arguments, code in ((["--summary", self.folder / "missing/s.json"], 4), (["--set", "path.feed_mm_per_min=0"], 2),
                                (["--summary", "/dev/full"], 4), (["--step", "1e-15"], 2)):
            with self.subTest(arguments=arguments):
                self.refused(kfeed(*PLAN, "--force", "--points", old, *arguments), code)
                self.assertEqual(old.read_text(), "old")
                self.assertEqual(self.names(), ["a.csv"])
        kept = self.file("s.json", "old")
        self.refused(kfeed(*PLAN, "--points", self.folder / "new.csv", "--summary", kept), 4, "s.json")
        self.assertEqual(self.names(), ["a.csv", "s.json"])

    def test_places_that_can_not_be_written_are_exit_4(self):
        plain = self.file("plain", "x")
        for place in (self.folder / "missing/a.csv", plain / "a.csv", self.folder, "/proc/a.csv", "/dev/full"):
            with self.subTest(place=place):
                self.refused(kfeed(*PLAN, "--points", place), 4, str(place))
        self.assertEqual(self.names(), ["plain"])

    def test_an_input_is_never_replaced(self):
        drawing = self.file("part.dxf", GASKET.read_bytes())
        limits = self.file("limits.json", ROUTER.read_bytes())
        for place in (drawing, limits):
            self.refused(kfeed("plan", drawing, "--limits", limits, "--points", place, "--force"), 2, "of this run")
        self.refused(kfeed(*PLAN, "--points", self.folder / "a", "--summary", self.folder / "./a"), 2, "two outputs")
        self.assertEqual(drawing.read_bytes(), GASKET.read_bytes())

    def test_a_small_disk_that_fills_leaves_the_old_file(self):
        # A file-size limit of 64 KiB stands in for the disk: it needs no mount.
        old = self.file("a.csv", "old")
        run = subprocess.run(["bash", "-c", 'trap "" XFSZ; ulimit -f 64; exec "$@"', "-",
                              str(pathlib.Path(os.environ.get("KF_BIN", "")) / "kfeed"), *map(str, PLAN), "--step", "1e-4",
                              "--points", str(old), "--force"], capture_output=True, check=False)
        self.assertEqual(run.returncode, 4, run.stderr)
        self.assertEqual(old.read_text(), "old")
        self.assertEqual(self.names(), ["a.csv"])


class Streams(InAFolder):
    def test_a_dash_is_standard_output_and_nothing_else_goes_there(self):
        path = self.folder / "a.csv"
        kfeed(*PLAN, "--points", path)
        self.assertEqual(kfeed(*PLAN, "--points", "-").out, path.read_text())
        self.assertTrue(kfeed(*PLAN, "--summary", "-").out.startswith("{"))

    def test_a_full_standard_output_is_exit_4_and_no_crash(self):
        for arguments in (["--json"], ["--points", "-"], ["--summary", "-"]):
            with self.subTest(arguments=arguments), open("/dev/full", "wb") as full:
                run = kfeed("plan", GASKET, "--limits", ROUTER, "--law", "acceleration", *arguments, stdout=full)
                self.assertEqual(run.code, 4, run.err)
                self.assertNotIn("terminate", run.err)
        with open("/dev/full", "wb") as full:
            self.assertEqual(kfeed("inspect", GASKET, stdout=full).code, 4)
            self.assertEqual(kfeed("inspect", GASKET, "--json", stdout=full).code, 4)


class Sameness(InAFolder):
    def test_the_bytes_are_the_same_in_any_locale(self):
        for name in ("de_DE", "tr_TR", "ar_EG", "fr_FR"):
            made = subprocess.run(["localedef", "-i", name, "-f", "UTF-8", str(self.folder / (name + ".UTF-8"))],
                                  capture_output=True, check=False)
            self.assertIn(made.returncode, (0, 1), made.stderr)  # 1: made, with warnings
            self.assertTrue((self.folder / (name + ".UTF-8") / "LC_NUMERIC").exists(), made.stderr)
        comma = subprocess.run(["/usr/bin/printf", "%.1f", "1,5"], env={"LC_ALL": "de_DE.UTF-8", "LOCPATH": str(self.folder)},
                               capture_output=True, check=False)
        self.assertEqual(comma.stdout, b"1,5", "the locale made here is not in force")
        for arguments in (["--points", "-"], ["--json"], ["--points", "-", "--sample", "chord"]):
            plain = kfeed("plan", GASKET, "--limits", ROUTER, "--law", "acceleration", *arguments, environment={"LC_ALL": "C"}).out
            self.assertGreater(len(plain), 1000)
            for name in ("de_DE", "tr_TR", "ar_EG", "fr_FR"):
                there = kfeed("plan", GASKET, "--limits", ROUTER, "--law", "acceleration", *arguments,
                              environment={"LC_ALL": name + ".UTF-8", "LOCPATH": str(self.folder)}).out
                self.assertEqual(plain, there, name)

    def test_the_bytes_are_the_same_for_any_number_of_threads(self):
        made = {}
        for threads in (1, 2, 5):
            out = self.folder / str(threads)
            out.mkdir()
            run = kfeed("plan", *sorted(SAMPLES.glob("*.dxf")), "--units", "mm", "--limits", ROUTER, "--threads", threads,
                        "--law", "acceleration", "--output-folder", out, "--points", ".csv", "--summary", ".json", "--step", "0.01")
            self.assertEqual(run.code, 0, run.err)
            made[threads] = ({p.name: p.read_bytes() for p in out.iterdir()}, run.out)
        self.assertEqual(made[1], made[2])
        self.assertEqual(made[1], made[5])
        one = [kfeed("plan", GASKET, "--limits", ROUTER, "--contour", "1-3", "--json", "--threads", n).out for n in (1, 4)]
        self.assertEqual(one[0], one[1])
