"""Embedder cards, ONNX sessions and the default face models; the only room that runs networks."""

import os

# onnxruntime 1.32 notes its use in the user's cache folder and tells its maker over the network, from the first session
# on; its own `disable_telemetry_events` comes too late for the files. Photos of people are none of its business.
os.environ["ORT_DISABLE_TELEMETRY"] = "1"
