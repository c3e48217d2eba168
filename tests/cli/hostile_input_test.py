"""Input that is damaged, absurd or not what it says: one sentence and an exit code, never a crash or a half answer."""
import json
import random

from driving import ROUTER, SAMPLES, InAFolder, kfeed

SEED = 20261201
GASKET = SAMPLES / "gasket.dxf"


def limits(**changes):
    return json.dumps({**json.loads(ROUTER.read_text()), **changes})


class Drawings(InAFolder):
    def test_what_is_no_drawing_is_refused(self):
        cases = {"empty.dxf": b"", "blank.dxf": b" \r\n \n", "text.dxf": b"hello\n", "zeros.dxf": bytes(5000),
                 "noise.dxf": random.Random(SEED).randbytes(20000), "noise.csv": random.Random(SEED).randbytes(20000),
                 "noise.bin": random.Random(SEED).randbytes(20000), "words.csv": b"x,y\na,b\n", "one.csv": b"x,y\n1,2\n",
                 "nan.csv": b"x,y\n0,0\nnan,1\n2,2\n", "inf.csv": b"x,y\n0,0\n1e999,1\n2,2\n",
                 "same.csv": b"x,y\n1,1\n1,1\n1,1\n", "deep.svg": b"<svg>" + b"<g>" * 100000,
                 "open.svg": b"<svg xmlns='http://www.w3.org/2000/svg'><path d='M0 0 L"}
        for name, content in cases.items():
            with self.subTest(name=name):
                self.refused(kfeed("inspect", self.file(name, content), "--units", "mm"), 3)

    def test_places_that_hold_no_drawing_are_refused(self):
        for place in (self.folder, self.folder / "missing.dxf", self.file("file", "x") / "under.dxf", "/dev/null"):
            with self.subTest(place=place):
                self.refused(kfeed("inspect", place), 3)

    def test_every_prefix_of_a_drawing_is_refused_never_half_read(self):
        whole = GASKET.read_bytes()
        marks = random.Random(SEED)
        end = whole.rstrip().rfind(b"EOF")
        for length in sorted(marks.randrange(1, end) for _ in range(60)):
            with self.subTest(length=length):
                self.refused(kfeed("inspect", "-", "--units", "mm", stdin=whole[:length]), 3)

    def test_damaged_bytes_never_crash(self):
        whole = (SAMPLES / "cam_plate.dxf").read_bytes()
        marks = random.Random(SEED)
        for _ in range(60):
            damaged = bytearray(whole)
            for _ in range(marks.randrange(1, 20)):
                damaged[marks.randrange(len(damaged))] = marks.randrange(256)
            run = kfeed("plan", "-", "--limits", ROUTER, "--units", "mm", "--json", "--law", "acceleration", stdin=bytes(damaged))
            self.assertIn(run.code, (0, 1, 3), run.err)
            if run.code == 0:
                json.loads(run.out)

    def test_what_can_not_be_used_needs_a_yes_and_stays_visible(self):
        import ezdxf
        document = ezdxf.new("R2000")
        document.header["$INSUNITS"] = 4
        space = document.modelspace()
        space.add_circle((0, 0), 20)
        space.add_3dface([(0, 0, 0), (1, 0, 0), (1, 1, 5), (0, 1, 0)])
        space.add_mesh()
        path = self.folder / "mixed.dxf"
        document.saveas(path)
        self.refused(kfeed("inspect", path), 3, "3DFACE", "MESH", "--allow-skipped")
        run = kfeed("inspect", path, "--allow-skipped", "--json")
        self.assertEqual(run.code, 0)
        self.assertEqual({row["kind"] for row in json.loads(run.out)["skipped"]}, {"3DFACE", "MESH"})
        self.assertIn("3DFACE", run.err)


class Limits(InAFolder):
    def test_damaged_limits_are_refused(self):
        axes = json.loads(ROUTER.read_text())["axes"]
        cases = {"not json": (b"{", 3), "nothing": (b"", 3), "a list": (b"[]", 3), "deep": (b"[" * 200000, 3),
                 "not utf-8": (b'{"format":"\xff\xfe"}', 3), "newer": (limits(version=2).encode(), 3),
                 "other": (limits(format="x").encode(), 3), "unknown": (limits(pth={}).encode(), 3),
                 "zero": (limits(path={"feed_mm_per_min": 0}).encode(), 3),
                 "huge": (limits(path={"feed_mm_per_min": 0}).replace(": 0}", ": 1e999}").encode(), 3),
                 "text": (limits(path={"feed_mm_per_min": "fast"}).encode(), 3),
                 "one axis": (limits(axes={"X": axes["X"]}).encode(), 2), "big": (b" " * (1 << 20) + b"{}", 3),
                 "twice": (b'{"format":"kappafeed-limits","version":1,"name":"a","name":"b"}', 3),
                 "comment": (b'/* */ ' + limits().encode(), 3)}
        for name, (content, code) in cases.items():
            with self.subTest(name=name):
                self.refused(kfeed("plan", GASKET, "--limits", self.file("l.json", content)), code)

    def test_the_nearest_key_is_named(self):
        path = self.file("l.json", limits(path={"feed_mm_per_minute": 6000}))
        self.refused(kfeed("plan", GASKET, "--limits", path), 3, "path.feed_mm_per_minute'", "path.feed_mm_per_min'")
