"""Runs the client against the server that RAILPROOF_URL names."""

import io
import os
import threading
import unittest
from http.server import BaseHTTPRequestHandler, HTTPServer
from typing import List

from railproof import Client, JobNotDoneError, NoAnswerError, ProblemError
from railproof.contract import CONTRACT_VERSION, Job
from railproof.job import ProgressLine

client = Client(os.environ["RAILPROOF_URL"])


class Answers(unittest.TestCase):
    def test_losses_of_every_rail(self) -> None:
        checked = 0
        for rail in ("buoy-5v0", "buoy-3v3", "mast-12v0"):
            answer = client.losses(client.example(rail, "losses"))
            self.assertEqual(answer["status"], "ok")
            self.assertEqual(answer["engine"]["contract_version"], CONTRACT_VERSION)
            for item in answer.get("items", []):
                checked += 1
                lost = sum(loss["power_w"] * loss.get("count", 1) for loss in item["losses"])
                quantities = item["quantities"]
                self.assertAlmostEqual(lost, quantities["loss_total_w"], delta=1e-9 * quantities["input_power_w"])
        self.assertGreater(checked, 1)

    def test_draft_stage_is_posted_on(self) -> None:
        sized = client.sizing(client.example("mast-12v0", "sizing"))
        answer = client.losses({"stage": sized["stage"], "point": sized["point"]})
        self.assertEqual(answer["status"], "ok")

    def test_explanation_on_request(self) -> None:
        request = client.example("buoy-5v0", "losses")
        plain, explained = client.losses(request), client.losses(request, explain=True)
        self.assertEqual(plain["result_id"], explained["result_id"])
        self.assertGreater(len(str(explained)), len(str(plain)))

    def test_dictionary(self) -> None:
        known = {q["key"]: q for q in client.list_quantities()["quantities"]}
        self.assertEqual(known["output_ripple_pp_v"]["unit"], "V")


class Refusals(unittest.TestCase):
    def test_fault_has_its_pointer(self) -> None:
        request = client.example("buoy-5v0", "losses")
        request["stage"]["inductor"]["inductance_h"] = -1
        with self.assertRaises(ProblemError) as refused:
            client.losses(request)
        self.assertEqual(refused.exception.status, 422)
        self.assertEqual(refused.exception.kind, "schema")
        self.assertEqual(refused.exception.pointers, ["/stage/inductor/inductance_h"])
        self.assertIn("/stage/inductor/inductance_h", str(refused.exception))

    def test_all_faults_at_once(self) -> None:
        request = client.example("buoy-5v0", "losses")
        request["stage"]["inductor"]["inductance_h"] = "much"
        request["stage"]["no_such_field"] = 1
        with self.assertRaises(ProblemError) as refused:
            client.losses(request)
        self.assertEqual(len(refused.exception.faults), 2)

    def test_not_a_number_never_leaves(self) -> None:
        with self.assertRaises(ValueError):
            client.losses({"stage": {"inductor": {"inductance_h": float("nan")}}})  # type: ignore[typeddict-item]

    def test_nobody_there(self) -> None:
        with self.assertRaises(NoAnswerError):
            Client("http://127.0.0.1:9").list_quantities()

    def test_unknown_operation_names_those_there_are(self) -> None:
        with self.assertRaisesRegex(ValueError, "steadyState"):
            client.picture("steadystate", {})

    def test_busy_server_is_asked_again(self) -> None:
        asked: List[str] = []

        class Busy(BaseHTTPRequestHandler):
            def do_GET(self) -> None:
                asked.append(self.path)
                self.send_response(503 if len(asked) < 3 else 200)
                self.send_header("Retry-After", "0")
                body = b'{"type": "/docs/problems/busy", "title": "Busy", "status": 503}' if len(asked) < 3 else b'{"quantities": []}'
                self.send_header("Content-Type", "application/problem+json" if len(asked) < 3 else "application/json")
                self.send_header("Content-Length", str(len(body)))
                self.end_headers()
                self.wfile.write(body)

            def log_message(self, format: str, *args: object) -> None:
                """Keeps the test's output clean."""

        server = HTTPServer(("127.0.0.1", 0), Busy)
        thread = threading.Thread(target=server.serve_forever)
        thread.start()
        try:
            at = f"http://127.0.0.1:{server.server_port}"
            self.assertEqual(Client(at).list_quantities()["quantities"], [])
            self.assertEqual(len(asked), 3)
            asked.clear()
            with self.assertRaises(ProblemError) as refused:
                Client(at, patience=1).list_quantities()
            self.assertEqual(refused.exception.status, 503)
        finally:
            server.shutdown()
            thread.join()
            server.server_close()


class Forms(unittest.TestCase):
    def test_pictures_show_themselves(self) -> None:
        request = client.example("mast-12v0", "steady_state")
        svg = client.picture("steady_state", request)._repr_svg_()
        self.assertIsNotNone(svg)
        self.assertIn("<svg", svg or "")
        self.assertTrue((client.picture("steady_state", request, "png")._repr_png_() or b"").startswith(b"\x89PNG"))

    def test_table(self) -> None:
        header = client.table("losses", client.example("buoy-5v0", "losses")).splitlines()[0]
        self.assertIn("power_w", header)


class Jobs(unittest.TestCase):
    def request(self, samples: int, seed: int) -> object:
        request = client.example("buoy-5v0", "corners")
        request["samples"] = samples
        request["seed"] = seed
        return request

    def test_answer_is_the_one_without_a_job(self) -> None:
        request = client.example("buoy-5v0", "corners")
        seen: List[Job] = []
        answer = client.submit("corners", request).wait(timeout_s=120, on_progress=seen.append)
        self.assertEqual(answer, client.corners(request))
        self.assertEqual(seen[-1]["state"], "done")

    def test_cancelled_job_says_so(self) -> None:
        job = client.submit("corners", self.request(1_000_000, 7))  # type: ignore[arg-type]
        self.assertEqual(job.cancel()["id"], job.id)
        with self.assertRaises(JobNotDoneError):
            job.wait(timeout_s=60)

    def test_progress_is_for_terminals(self) -> None:
        class Terminal(io.StringIO):
            def isatty(self) -> bool:
                return True

        job: Job = {"id": "job_1", "operation": "corners", "state": "running", "progress": {"fraction_ratio": 0.5, "samples": 5000, "remaining_s": 3.0}, "created_at": "2026-03-01T02:00:00Z"}
        terminal, pipe = Terminal(), io.StringIO()
        for stream in (terminal, pipe):
            line = ProgressLine(stream)
            line.show(job)
            line.end()
        self.assertIn("[==========          ]  50 % running, 5,000 evaluations, 3 s left", terminal.getvalue())
        self.assertEqual(pipe.getvalue(), "")


if __name__ == "__main__":
    unittest.main()
