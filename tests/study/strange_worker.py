"""A worker that does strange things as it is told, to see what a pool makes of them.

python strange_worker.py [--stillborn] IN OUT
"""

from __future__ import annotations

import json
import os
import signal
import sys
import time
from pathlib import Path
from typing import Any


def main() -> None:
    if "--stillborn" in sys.argv:
        print("no such thing as a life", file=sys.stderr)
        sys.exit(3)
    source, sink = int(sys.argv[-2]), int(sys.argv[-1])
    print("a library greets its user")  # harms nobody: not the pipe that is listened to

    def say(reply: Any) -> None:
        text = reply if isinstance(reply, str) else json.dumps(reply)
        os.write(sink, (text + "\n").encode())

    say({"ready": True})
    with os.fdopen(source) as lines:
        for line in lines:
            task = json.loads(line)
            if task.get("log"):
                with Path(task["log"]).open("a") as log:
                    log.write(f"{task['key']} {os.getpid()} {time.time()}\n")
            do(task, say)


def do(task: dict[str, Any], say: Any) -> None:
    what = task["do"]
    if what == "die once":
        if not Path(task["mark"]).exists():
            Path(task["mark"]).touch()
            os.kill(os.getpid(), signal.SIGKILL)
    elif what == "die":
        print("something went wrong", file=sys.stderr)
        os.kill(os.getpid(), getattr(signal, task["signal"]))
    elif what == "leave":
        os._exit(task["code"])
    elif what == "garble":
        say(task["text"])
        time.sleep(60)
    elif what == "hang":
        signal.signal(signal.SIGTERM, signal.SIG_IGN)
        Path(task["mark"]).touch()
        time.sleep(600)
    elif what == "chat":
        print("x" * 200_000)
        sys.stdout.flush()
    time.sleep(task.get("seconds", 0.0))
    say({"key": task["key"], "pid": os.getpid(), "length": len(task.get("text", ""))})


if __name__ == "__main__":
    main()
