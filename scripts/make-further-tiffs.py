"""Writes the further TIFF files of test/data/tiff-further with tifffile and, for LZW, PackBits and the
floating-point predictor, with libtiff through Pillow; expected.json holds what NumPy says of the same arrays.

Run: python3 scripts/make-further-tiffs.py test/data/tiff-further
Made with tifffile 2023.2.3, Pillow 9.4.0 (libtiff 4.5.0)."""

import json
import sys

import numpy as np
import tifffile
from PIL import Image

OUT = sys.argv[1]
K, Y, X = np.mgrid[0:3, 0:23, 0:30]
INT16 = ((7 * X + 13 * Y + 301 * K) % 1501 - 700).astype(np.int16)
INT32 = ((70001 * (X + Y + K)) % 9000001 - 4000000).astype(np.int32)
UINT32 = (70000 * (X + Y + K) + 17).astype(np.uint32)
UINT16 = (11 * X + 37 * Y + 1000 * K).astype(np.uint16)
FLOAT32 = (np.sin(0.3 * X + 0.2 * Y + K) * 1000 / 7).astype(np.float32)
FLOAT64 = np.cos(0.3 * X + 0.2 * Y + K) * 1e6 / 7

expected = {}


def record(name, array):
    values = array.astype(float)
    expected[name] = {
        "shape": list(array.shape),
        "absolute_sum": float(np.abs(values).sum()),
        "at_1_17_5": float(values[1, 17, 5]),
        "at_2_22_29": float(values[2, 22, 29]),
    }


def by_tifffile(name, array, byteorder="<", bigtiff=False, **options):
    with tifffile.TiffWriter(f"{OUT}/{name}", byteorder=byteorder, bigtiff=bigtiff) as tif:
        for page in array:
            tif.write(page, photometric="minisblack", metadata=None, contiguous=False, **options)
    record(name, array)


def by_libtiff(name, array, compression, predictor=None):
    pages = [Image.fromarray(page) for page in array]
    info = {} if predictor is None else {317: predictor}
    pages[0].save(f"{OUT}/{name}", save_all=True, append_images=pages[1:], compression=compression, tiffinfo=info)
    record(name, array)


by_tifffile("deflate_predictor_int16.tif", INT16, compression="zlib", predictor=True, rowsperstrip=5)
by_tifffile("deflate_predictor_uint32_big_endian.tif", UINT32, ">", compression="zlib", predictor=True)
by_tifffile("deflate_tiled_bigtiff_uint16.tif", UINT16, bigtiff=True, compression="zlib", tile=(16, 32))
by_tifffile("strips_uint16.tif", UINT16, rowsperstrip=4)
by_tifffile("float64_big_endian.tif", FLOAT64, ">")
by_tifffile("uint64.tif", UINT32.astype(np.uint64) * 5)
by_libtiff("packbits_float32.tif", FLOAT32, "packbits")
by_libtiff("lzw_predictor_float32.tif", FLOAT32, "tiff_lzw", 3)
by_libtiff("deflate_predictor_float32.tif", FLOAT32, "tiff_adobe_deflate", 3)
by_libtiff("lzw_predictor_int32.tif", INT32, "tiff_lzw", 2)
with open(f"{OUT}/expected.json", "w") as file:
    json.dump(expected, file, indent=1)
    file.write("\n")
