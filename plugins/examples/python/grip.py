#!/usr/bin/python3
"""A law plugin in Python: the same law as ../law, a slider with smoothed dry friction.

Needs what Debian packages as python3-grpcio and python3-protobuf, and tautspan_pb2.py
beside it (protoc --python_out=. tautspan.proto). Make it executable, then:

    tautspan plugins add ./grip.py

The checksum that tautspan records is that of this file alone, not of what it imports.
"""
import os
import sys
import tempfile
import threading
from concurrent import futures

import grpc
import tautspan_pb2 as pb

TEXT = "force = -hold * v / sqrt(v ^ 2 + soft ^ 2)"


def about():
    d = pb.Description(
        name="grip-py", version="1", kind="law", dissipates=True,
        says="a slider that holds with a smoothed dry friction, an example in Python",
        formula="F = -hold * v / sqrt(v^2 + soft^2)", source="an invented smoothing of dry friction (Coulomb)")
    d.parameters.add(name="hold", unit="N", says="largest force", least=0, most=1e9)
    d.parameters.add(name="soft", unit="m/s", says="speed at which it has come to 0.7 of that",
                     least=1e-6, most=1e3, has_preset=True, preset=0.005)
    return d


def follow(steps, context):
    """Step by step, for whoever asks: the written text is faster by far."""
    task = None
    for step in steps:
        task = task or step.task.parameters
        hold, soft = task["hold"], task["soft"]
        yield pb.LawForce(force=-hold * step.v / (step.v ** 2 + soft ** 2) ** 0.5)


class Service(grpc.GenericRpcHandler):
    """The methods by name; bytes in, bytes out."""

    def __init__(self, stop):
        one, many = grpc.unary_unary_rpc_method_handler, grpc.stream_stream_rpc_method_handler
        law = "/tautspan.plugin.v1.Law/"
        self.methods = {
            "/tautspan.plugin.v1.Plugin/Describe": one(
                lambda request, context: about(), pb.DescribeRequest.FromString, pb.Description.SerializeToString),
            law + "Written": one(
                lambda request, context: pb.LawText(text=TEXT), pb.LawTask.FromString, pb.LawText.SerializeToString),
            law + "Follow": many(follow, pb.LawStep.FromString, pb.LawForce.SerializeToString),
            # What the host asks of every plugin: is it well (1 is SERVING), and please end.
            "/grpc.health.v1.Health/Check": one(lambda request, context: b"\x08\x01"),
            "/plugin.GRPCController/Shutdown": one(lambda request, context: stop() or b""),
        }

    def service(self, call):
        return self.methods.get(call.method)


def main():
    if os.environ.get("TAUTSPAN_PLUGIN") != "taut lines carry waves":
        sys.exit("This is a plugin for tautspan: tautspan plugins add " + sys.argv[0])
    done = threading.Event()
    server = grpc.server(futures.ThreadPoolExecutor(max_workers=8), options=[
        ("grpc.max_receive_message_length", -1), ("grpc.max_send_message_length", -1)])
    server.add_generic_rpc_handlers((Service(done.set),))
    folder = os.environ.get("PLUGIN_UNIX_SOCKET_DIR") or tempfile.mkdtemp()
    path = os.path.join(folder, "grip.sock")
    server.add_insecure_port("unix:" + path)
    server.start()
    print("1|1|unix|" + path + "|grpc", flush=True)
    parent = os.getppid()
    while not done.wait(0.25):
        if os.getppid() != parent:
            break  # the host was killed and cannot say goodbye
    server.stop(0.2).wait()


if __name__ == "__main__":
    main()
