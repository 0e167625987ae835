#!/usr/bin/env python3
"""The main job as a good practitioner would script it with scikit-image and SciPy.

Reads every film of a folder, finds and outlines nuclei frame by frame, links them, fits import and
entry, fits one speed a wave, and writes tables, a workbook and a kymograph. It is the yardstick of
scripts/bench for time, and a reader's check of how the same job looks without Wavefount; it knows no
uncertainty, no drift, no tube outline and no origins.

    scripted_baseline.py FILMS OUT [WORKERS]
"""

import csv
import multiprocessing
import pathlib
import re
import sys
import xml.etree.ElementTree as ElementTree

import numpy as np
import openpyxl
import tifffile
from scipy import ndimage, optimize
from skimage import feature, filters, measure, morphology, segmentation

SMALLEST_UM, LARGEST_UM = 4.0, 25.0


def film_of(path):
    """Frames, µm a pixel and minutes a frame of an OME-TIFF, a TIFF with sidecar, or a folder."""
    if path.is_dir():
        pages = sorted(path.glob("*.tif"), key=lambda p: [int(n) for n in re.findall(r"\d+", p.name)])
        frames = (tifffile.imread(page) for page in pages)
        return frames, len(pages), *sidecar_of(path.with_suffix(".yaml"))
    tiff = tifffile.TiffFile(path)
    frames = (page.asarray() for page in tiff.pages)
    if tiff.ome_metadata:
        root = ElementTree.fromstring(tiff.ome_metadata)
        pixels = next(e for e in root.iter() if e.tag.endswith("Pixels"))
        stamps = [float(e.get("DeltaT", 0)) for e in root.iter() if e.tag.endswith("Plane")]
        pixel_um = float(pixels.get("PhysicalSizeX"))
        minutes = np.array(stamps) / 60 if any(stamps) else None
        interval = float(pixels.get("TimeIncrement", 60)) / 60
        return frames, len(tiff.pages), pixel_um, minutes if minutes is not None else interval
    return frames, len(tiff.pages), *sidecar_of(path.with_suffix("").with_suffix(".yaml"))


def sidecar_of(path):
    text = path.read_text()
    pixel_um = float(re.search(r"pixel_size_um:\s*([\d.]+)", text).group(1))
    interval = re.search(r"frame_interval_min:\s*([\d.]+)", text)
    if interval:
        return pixel_um, float(interval.group(1))
    times = re.search(r"times_min:\s*\[([^\]]*)\]", text, re.S).group(1)
    return pixel_um, np.array([float(t) for t in times.split(",")])


def nuclei_of(frame, pixel_um):
    """Labelled nuclei of one frame: Laplacian seeds, local threshold, watershed, properties."""
    image = frame.astype(np.float32)
    smooth = filters.gaussian(image, 1.0, preserve_range=True)
    background = ndimage.median_filter(smooth[::4, ::4], size=int(4 * LARGEST_UM / pixel_um / 4) | 1)
    background = np.repeat(np.repeat(background, 4, 0), 4, 1)[: image.shape[0], : image.shape[1]]
    excess = smooth - background
    noise = 1.4826 * np.median(np.abs(excess - np.median(excess)))
    response = np.zeros_like(excess)
    for radius in np.geomspace(SMALLEST_UM, LARGEST_UM, 5) / pixel_um:
        sigma = radius / np.sqrt(2)
        response = np.maximum(response, -sigma**2 * ndimage.gaussian_laplace(excess, sigma))
    seeds = feature.peak_local_max(response, min_distance=int(SMALLEST_UM / pixel_um) + 1,
                                   threshold_abs=6 * noise)
    markers = np.zeros(image.shape, np.int32)
    markers[tuple(seeds.T)] = np.arange(1, len(seeds) + 1)
    mask = morphology.remove_small_objects(excess > filters.threshold_otsu(excess), 12)
    labels = segmentation.watershed(-smooth, markers, mask=mask)
    found = []
    for region in measure.regionprops(labels, intensity_image=excess):
        y, x = region.centroid
        found.append((x * pixel_um, y * pixel_um, region.area * pixel_um**2, region.mean_intensity))
    return found


def link(frames, reach_um=20.0, memory=25):
    """Frame-to-frame assignment with a memory that bridges mitosis."""
    tracks = []
    for frame, found in enumerate(frames):
        live = [t for t in tracks if frame - t[-1][0] <= memory]
        taken = set()
        if live and found:
            ends = np.array([t[-1][1:3] for t in live])
            places = np.array([f[:2] for f in found])
            distance = np.linalg.norm(ends[:, None] - places[None], axis=2)
            for row, column in zip(*optimize.linear_sum_assignment(np.minimum(distance, 2 * reach_um))):
                if distance[row, column] <= reach_um:
                    live[row].append((frame, *found[column]))
                    taken.add(column)
        tracks += [[(frame, *f)] for i, f in enumerate(found) if i not in taken]
    return [t for t in tracks if len(t) >= 5]


def filling(t, plateau, rate, start):
    return plateau * (1 - np.exp(-rate * np.maximum(t - start, 0)))


def fall(t, top, entry, steepness, bottom):
    return bottom + (top - bottom) / (1 + np.exp(np.clip((t - entry) / steepness, -50, 50)))


def fit(model, t, y, start):
    try:
        return optimize.curve_fit(model, t, y, start, maxfev=2000)[0]
    except (RuntimeError, ValueError, TypeError):
        return None


def cycles_of(track, times):
    """Interphases between gaps; an import fit and an entry each."""
    frames = np.array([p[0] for p in track])
    cycles = []
    for part in np.split(np.array(track), np.where(np.diff(frames) > 2)[0] + 1):
        t, brightness = times[part[:, 0].astype(int)], part[:, 4]
        if len(part) < 5:
            continue
        imported = fit(filling, t, brightness, (brightness.max(), 0.1, t[0]))
        end = np.append(t[-6:], t[-1] + np.diff(times).mean() * np.arange(1, 4))
        level = np.append(brightness[-6:], np.zeros(3))
        entry = fit(fall, end, level, (brightness[-1], t[-1], 0.3, 0.0))
        cycles.append((part[-1, 1], part[-1, 2], entry[1] if entry is not None else t[-1],
                       *(imported if imported is not None else (np.nan,) * 3)))
    return cycles


def draw_kymograph(path, columns):
    """A grey picture of light along the image against time."""
    picture = np.array(columns)
    low, high = np.percentile(picture, (1, 99.5))
    scaled = np.clip((picture - low) / max(high - low, 1e-9) * 255, 0, 255).astype(np.uint8)
    tifffile.imwrite(path, scaled, compression="zlib")


def measure_film(job):
    path, out = job
    frames, count, pixel_um, minutes = film_of(path)
    times = minutes if isinstance(minutes, np.ndarray) else np.arange(count) * minutes
    found, columns = [], []
    for frame in frames:
        found.append(nuclei_of(frame, pixel_um))
        columns.append(frame.mean(axis=0))
    rows = []
    for nucleus, track in enumerate(link(found)):
        rows += [(path.name, nucleus, *cycle) for cycle in cycles_of(track, times)]
    target = out / path.name
    target.mkdir(parents=True, exist_ok=True)
    with open(target / "cycles.csv", "w", newline="") as file:
        csv.writer(file).writerows(rows)
    draw_kymograph(target / "kymograph.tif", columns)
    return rows


def main():
    films, out = pathlib.Path(sys.argv[1]), pathlib.Path(sys.argv[2])
    workers = int(sys.argv[3]) if len(sys.argv) > 3 else 2
    jobs = [(p, out) for p in sorted(films.iterdir()) if p.is_dir() or p.suffix == ".tif"]
    with multiprocessing.Pool(workers) as pool:
        results = pool.map(measure_film, jobs, chunksize=1)
    book = openpyxl.Workbook(write_only=True)
    sheet = book.create_sheet("cycles")
    for rows in results:
        for row in rows:
            sheet.append([None if isinstance(v, float) and np.isnan(v) else v for v in row])
    book.save(out / "cycles.xlsx")


if __name__ == "__main__":
    main()
