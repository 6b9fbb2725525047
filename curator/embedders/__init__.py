"""Embedder cards, ONNX sessions and the default face models. The only room that speaks onnxruntime and onnx."""
