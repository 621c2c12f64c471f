"""Benches to draw figures and reports of, and readers of what was written."""

import re
import shutil
import subprocess
import xml.etree.ElementTree as ET
from dataclasses import replace

import numpy as np
import pytest
from PySide6.QtGui import QImage

from core.state import BenchState, OrientationChoice, Specimen, as_matrix
from tests import materials

SVG = "{http://www.w3.org/2000/svg}"
TRICLINIC = Specimen(
    "Test piece", as_matrix(materials.random_physical(np.random.default_rng(3))), 2700.0,
    source="invented")  # fmt: skip
BENCH = BenchState(TRICLINIC, orientation_b=OrientationChoice("bunge 10 20 30"),
                   pin=(0.0, 0.6, 0.8))  # fmt: skip
DULL = replace(BENCH, specimen=replace(TRICLINIC, density=None))

needs_poppler = pytest.mark.skipif(
    shutil.which("pdftotext") is None or shutil.which("pdftoppm") is None,
    reason="pdftotext and pdftoppm (poppler-utils) are not installed")  # fmt: skip


def pixels_of(data):
    """Return a picture's bytes as an array (height, width, 4), red green blue alpha."""
    image = QImage.fromData(data).convertToFormat(QImage.Format.Format_RGBA8888)
    flat = np.frombuffer(image.constBits(), dtype=np.uint8)
    return flat.reshape(image.height(), image.bytesPerLine() // 4, 4)[:, : image.width()].copy()


def svg_of(data):
    """Return the root of an SVG, its texts and its embedded pictures."""
    root = ET.fromstring(data)
    texts = ["".join(node.itertext()) for node in root.iter(f"{SVG}text")]
    return root, texts, list(root.iter(f"{SVG}image"))


def pdf_text(data, path):
    """Return the words of a PDF, with one blank between them."""
    path.write_bytes(data)
    found = subprocess.run(["pdftotext", "-layout", str(path), "-"], capture_output=True,
                           check=True)  # fmt: skip
    return re.sub(r"\s+", " ", found.stdout.decode("utf-8"))


def pdf_pages(data, path, dpi=40):
    """Return the pages of a PDF as arrays of pixels."""
    path.write_bytes(data)
    subprocess.run(["pdftoppm", "-r", str(dpi), "-png", str(path), str(path.with_suffix(""))],
                   check=True)  # fmt: skip
    files = sorted(path.parent.glob(f"{path.stem}-*.png"))
    return [pixels_of(file.read_bytes()) for file in files]


def inked(pixels):
    """Return the share of pixels that are not white."""
    return float((pixels[..., :3].min(axis=2) < 245).mean())


def coloured(pixels):
    """Return the share of pixels that are neither white, black nor grey."""
    rgb = pixels[..., :3].astype(int)
    return float((rgb.max(axis=2) - rgb.min(axis=2) > 40).mean())
