"""How drawn portraits fare with the default face models: drawing rate, faces found, equal error rate.

Run with `python tests/bench/bench_portraits.py [SEED] [PEOPLE]`. The reference is what the set is made for: under
2 % equal error rate on the clean part and 99 % of the faces found.
"""

from __future__ import annotations

import io
import sys
import time

import numpy as np
from numpy.typing import NDArray
from PIL import Image

from curator.demo.job import draw_photo
from curator.demo.plan import PEOPLE, SEED, Plan, plan_demo
from curator.demo.scoring import OF_ONE_PHOTO
from curator.embedders.cards import load_card
from curator.embedders.faces import FaceFinder, aligned_crop
from curator.embedders.session import Embedder


def clean_part(plan: Plan) -> list[str]:
    """Photos without a fault of their own and that are no copies of others."""
    spoilt = {p for d in plan.sheet.doubts if d.kind in OF_ONE_PHOTO for p in d.photos}
    copies = {e.copy for e in plan.sheet.echoes}
    return [p for p in plan.jobs if p not in spoilt and p not in copies]


def equal_error_rate(distances: NDArray[np.float64], mated: NDArray[np.bool_]) -> tuple[float, float]:
    """The rate at which both errors meet, and the distance where they do: one pass over the sorted pairs."""
    order = np.argsort(distances, kind="stable")
    mated = mated[order]
    missed = 1.0 - np.cumsum(mated) / mated.sum()
    let_in = np.cumsum(~mated) / (~mated).sum()
    at = int(np.abs(missed - let_in).argmin())
    return float((missed[at] + let_in[at]) / 2.0), float(distances[order][at])


def main() -> None:
    seed = int(sys.argv[1]) if len(sys.argv) > 1 else SEED
    people = int(sys.argv[2]) if len(sys.argv) > 2 else PEOPLE
    plan = plan_demo(seed, people=people)
    start = time.perf_counter()
    files = {path: draw_photo(job) for path, job in plan.jobs.items()}
    seconds = time.perf_counter() - start
    megabytes = sum(map(len, files.values())) / 1e6
    print(f"{len(files)} photos, {megabytes:.2f} MB, {seconds:.1f} s: {1000 * seconds / len(files):.0f} ms a photo")
    finder, embedder = FaceFinder(), Embedder(load_card())
    crops, shown, lost = [], [], []
    clean = clean_part(plan)
    for path in clean:
        with Image.open(io.BytesIO(files[path])) as opened:
            photo = opened.convert("RGB")
        faces = finder.find(photo)
        if not faces:
            lost.append(path)
            continue
        crops.append(aligned_crop(photo, faces[0].landmarks))
        shown.append(plan.sheet.true_person[path])
    print(f"faces found: {1 - len(lost) / len(clean):.2%} (reference 99 %); not in {lost}")
    embeddings = embedder.embed(np.stack(crops)).astype(np.float64)
    who = np.array(shown)
    a, b = np.triu_indices(len(who), 1)
    distances = np.linalg.norm(embeddings[a] - embeddings[b], axis=1)
    mated = who[a] == who[b]
    rate, at = equal_error_rate(distances, mated)
    print(f"equal error rate {rate:.2%} at distance {at:.3f} (reference 2 %, ratio {rate / 0.02:.2f})")
    for name, chosen in (("mated", mated), ("non-mated", ~mated)):
        spread = ", ".join(f"{v:.3f}" for v in np.percentile(distances[chosen], [1, 5, 50, 95, 99]))
        print(f"{name} distances, percentiles 1 5 50 95 99: {spread}")
    worst = np.argsort(-np.where(mated, distances, 0.0))[:200]
    names, counts = np.unique(who[a[worst]], return_counts=True)
    print("rowers with the farthest mated pairs:", dict(zip(names.tolist(), counts.tolist(), strict=True)))


if __name__ == "__main__":
    main()
