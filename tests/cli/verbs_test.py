"""Every verb, option and exit code of kfeed."""
import json
import os
import signal
import subprocess
import time

from driving import BIN, ROUTER, SAMPLES, InAFolder, kfeed

GASKET = SAMPLES / "gasket.dxf"


class Usage(InAFolder):
    def test_help_and_version_answer_on_stdout(self):
        for arguments in (["--help"], ["inspect", "--help"], ["plan", "--help"], ["check", "--help"]):
            run = kfeed(*arguments)
            self.assertEqual((run.code, run.err), (0, ""))
            self.assertIn("Usage: kfeed", run.out)
        for arguments in (["--version"], ["inspect", "--version"], ["plan", "--version"]):
            self.assertRegex(kfeed(*arguments).out, r"^kfeed \d+\.\d+\.\d+\n$")

    def test_what_is_not_understood_is_exit_2(self):
        plan = ["plan", GASKET, "--limits", ROUTER]
        for arguments, part in (
                ([], "name a verb"), (["bogus"], "bogus"), (["--bogus"], "--bogus"), (["inspect"], "DRAWING"),
                (["inspect", "--bogus", GASKET], "--bogus"), (["plan", GASKET], "--limits"),
                (["inspect", GASKET, "--units", "cm"], "--units"), (plan + ["--law", "fast"], "--law"),
                (plan + ["--joints", "round"], "--joints"), (plan + ["--sample", "often"], "--sample"),
                (plan + ["--step", "-1"], "--step"), (plan + ["--step", "nan"], "--step"),
                (plan + ["--step", "inf"], "--step"), (plan + ["--step", "0"], "--step"),
                (plan + ["--step", "1e-15", "--points", "-"], "larger step"),
                (plan + ["--threads", "0"], "--threads"), (plan + ["--threads", "many"], "--threads"),
                (plan + ["--contour", "9"], "1 to 8"), (plan + ["--contour", "0"], "1 to 8"),
                (plan + ["--contour", "3-1"], "3-1"), (plan + ["--contour", "1,,2"], "--contour"),
                (plan + ["--contour", "99999999999999999999"], "--contour"),
                (plan + ["--set", "path.feed_mm_per_minute=3"], "path.feed_mm_per_min"), (plan + ["--set", "nothing"], "NAME=VALUE"),
                (plan + ["--set", "path.feed_mm_per_min=0"], "positive"),
                (plan + ["--set", "path.feed_mm_per_min=none"], "path.feed_mm_per_min"),
                (plan + ["--set", "tool.side=up"], "tool.side"),
                (plan + ["--json", "--points", "-"], "standard output"), (["plan", "-", "--limits", "-"], "standard input"),
                (["inspect", GASKET, GASKET, "--json"], "standard output"),
                (plan + [GASKET, "--points", self.folder / "a.csv"], "--output-folder"),
                (plan + ["--output-folder", self.folder / "missing", "--points", ".csv"], "not a folder")):
            with self.subTest(arguments=arguments):
                self.refused(kfeed(*arguments), 2, part)
        self.assertEqual(self.names(), [])

    def test_what_a_later_version_brings_says_so(self):
        plan = ["plan", GASKET, "--limits", ROUTER]
        for arguments in (["identify", "recording.csv"], plan + ["--report", "out.pdf"]):
            with self.subTest(arguments=arguments):
                self.refused(kfeed(*arguments), 2, "not available yet")


class Inspect(InAFolder):
    def test_json_is_one_document_and_nothing_else(self):
        run = kfeed("inspect", GASKET, "--json")
        document = json.loads(run.out)
        self.assertEqual((document["format"], document["version"]), ("kappafeed-summary", 1))
        self.assertEqual([c["number"] for c in document["contours"]], list(range(1, 9)))
        outline, port = document["contours"][:2]
        # Four straights and four quarter circles of 18 mm: 2 (124 + 64) + 36 pi.
        self.assertAlmostEqual(outline["length_mm"], 2 * (124 + 64) + 36 * 3.141592653589793, 9)
        self.assertEqual(len(outline["joints"]), 8)
        self.assertEqual({j["kind"] for j in outline["joints"]}, {"curvature-step"})
        # The tightest bend of an ellipse lies at the ends of its long axis: b^2 / a.
        self.assertAlmostEqual(port["min_radius_mm"], (46 * 0.62) ** 2 / 46, 6)
        self.assertEqual(document["ignored"][0]["kind"], "TEXT")
        self.assertIn("TEXT", document["warnings"][0])

    def test_contours_are_chosen_by_number(self):
        document = json.loads(kfeed("inspect", GASKET, "--json", "--contour", "2,4-5,4").out)
        self.assertEqual([c["number"] for c in document["contours"]], [2, 4, 5])

    def test_units_are_asked_for_when_the_drawing_does_not_say(self):
        oar = SAMPLES / "oar_blade.dxf"
        self.refused(kfeed("inspect", oar), 3, "--units mm")
        mm = json.loads(kfeed("inspect", oar, "--json", "--units", "mm").out)
        inch = json.loads(kfeed("inspect", oar, "--json", "--units", "in").out)
        self.assertAlmostEqual(inch["contours"][0]["length_mm"] / mm["contours"][0]["length_mm"], 25.4, 9)
        # A drawing that says its unit keeps it.
        self.assertEqual(kfeed("inspect", GASKET, "--units", "in").out, kfeed("inspect", GASKET).out)

    def test_quiet_leaves_only_errors(self):
        run = kfeed("inspect", GASKET, "--quiet")
        self.assertEqual((run.code, run.out, run.err), (0, "", ""))

    def test_standard_input_is_a_drawing(self):
        whole = json.loads(kfeed("inspect", GASKET, "--json").out)
        piped = json.loads(kfeed("inspect", "-", "--json", stdin=GASKET.read_bytes()).out)
        self.assertEqual(whole["contours"], piped["contours"])
        self.assertEqual(whole["drawing_sha256"], piped["drawing_sha256"])


class Plan(InAFolder):
    def test_summary_holds_together(self):
        run = kfeed("plan", GASKET, "--limits", ROUTER, "--json", "--law", "acceleration")
        document = json.loads(run.out)
        self.assertEqual(run.code, 0)
        self.assertAlmostEqual(document["total_time_s"], sum(c["time_s"] for c in document["contours"]), 9)
        for contour in document["contours"]:
            self.assertLessEqual(contour["time_lower_bound_s"], contour["time_s"])
            self.assertAlmostEqual(sum(contour["time_by_limit_s"].values()), contour["time_s"], 9)
            self.assertAlmostEqual(contour["mean_feed_mm_per_min"], 60 * contour["length_mm"] / contour["time_s"], 6)
            losses = [spot["time_lost_s"] for spot in contour["tight_spots"]]
            self.assertEqual(losses, sorted(losses, reverse=True))
            # What the tight spots lost is all that was lost against the programmed feed.
            if len(losses) < 200:
                self.assertAlmostEqual(sum(losses), contour["time_s"] - contour["length_mm"] / 150, 3)

    def test_set_changes_one_limit_and_limits_come_from_standard_input_too(self):
        time_at = {}
        for feed in (3000, 9000):
            run = kfeed("plan", GASKET, "--limits", "-", "--json", "--law", "acceleration", "--set", f"path.feed_mm_per_min={feed}",
                        "--set", "path.centripetal_acceleration_mm_per_s2=none", stdin=ROUTER.read_bytes())
            time_at[feed] = json.loads(run.out)["total_time_s"]
        self.assertGreater(time_at[3000], 1.5 * time_at[9000])

    def test_exact_joints_cost_a_stop_at_every_tangent_break(self):
        rib = SAMPLES / "rib_template.dxf"
        blend, exact = (json.loads(kfeed("plan", rib, "--limits", ROUTER, "--json", "--law", "acceleration", "--joints", j).out)
                        for j in ("blend", "exact"))
        self.assertGreater(exact["total_time_s"], blend["total_time_s"])
        self.assertLessEqual(blend["contours"][0]["driven"]["largest_deviation_mm"], 0.02)

    def test_limits_that_allow_no_motion_are_a_no_or_a_very_slow_plan(self):
        run = kfeed("plan", GASKET, "--contour", "3", "--limits", ROUTER, "--json", "--set", "path.feed_mm_per_min=1e-300")
        self.assertIn(run.code, (0, 1, 2))
        self.assertNotIn("terminate", run.err)

    def test_a_batch_is_a_line_a_drawing_and_one_bad_one_stops_nothing(self):
        out = self.folder / "out"
        out.mkdir()
        cam = SAMPLES / "cam_plate.dxf"
        run = kfeed("plan", GASKET, self.folder / "missing.dxf", cam, "--limits", ROUTER, "--threads", 2,
                    "--law", "acceleration", "--output-folder", out, "--points", ".csv", "--summary", ".json")
        self.assertEqual(run.code, 3)
        self.assertEqual([line.split(":")[0] for line in run.out.splitlines()], ["gasket.dxf", "cam_plate.dxf"])
        self.assertIn("missing.dxf", run.err)
        self.assertEqual(sorted(p.name for p in out.iterdir()),
                         ["cam_plate.csv", "cam_plate.json", "gasket.csv", "gasket.json"])
        # The same bytes as a run alone.
        alone = kfeed("plan", cam, "--limits", ROUTER, "--law", "acceleration", "--points", "-")
        self.assertEqual((out / "cam_plate.csv").read_text(), alone.out)

    def test_drawings_whose_outputs_would_share_a_name_are_refused(self):
        (self.folder / "a").mkdir()
        (self.folder / "b").mkdir()
        for name in "ab":
            (self.folder / name / "part.dxf").write_bytes(GASKET.read_bytes())
        self.refused(kfeed("plan", self.folder / "a/part.dxf", self.folder / "b/part.dxf", "--limits", ROUTER,
                           "--output-folder", self.folder, "--points", ".csv"), 2, "part.csv")

    def test_an_interrupt_is_exit_130_and_leaves_nothing(self):
        for number in (signal.SIGINT, signal.SIGTERM):
            child = subprocess.Popen([BIN / "kfeed", "inspect", "-"], stdin=subprocess.PIPE, stderr=subprocess.PIPE)
            time.sleep(0.3)
            child.send_signal(number)
            self.assertEqual(child.wait(20), 130)
            child.stdin.close()
            child.stderr.close()
        child = subprocess.Popen([BIN / "kfeed", "plan", SAMPLES / "deck_inlay.dxf", "--limits", ROUTER, "--quiet",
                                  "--nodes", "2000000", "--points", self.folder / "a.csv"], stderr=subprocess.PIPE)
        time.sleep(0.3)
        child.send_signal(signal.SIGINT)
        self.assertEqual(child.wait(60), 130)
        child.stderr.close()
        self.assertEqual(self.names(), [])
