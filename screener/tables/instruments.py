"""Tables in the files of measurement programs: HDF5, MATLAB, TDMS, MDF4. Each library comes with an extra."""

from collections.abc import Iterator, Sequence
from contextlib import closing
from pathlib import Path
from typing import Any

import numpy as np

from screener.errors import TableError
from screener.tables.arrays import Column, Found, chosen, columns_of, grouped, table_of
from screener.tables.extras import installed, understood
from screener.tables.raw import RawTable

_NAMES = ("columns", "column_names", "names", "channels")
_UNITS = ("unit", "units")


def read_hdf5(path: Path, part: str, held_bytes: int) -> RawTable:
    """A data set of two dimensions or of records, or the vectors of one group."""
    with installed("hdf5", path):
        import h5py
    matlab = _begins_as_matlab(path)
    with understood(path, "HDF5"), h5py.File(path, "r") as file:
        arrays: dict[str, list[Column]] = {}

        def note(name: str, item: Any) -> None:
            if isinstance(item, h5py.Dataset) and not name.startswith("#"):
                label, names, unit = name.rpartition("/")[2], _attribute(item, _NAMES), _attribute(item, _UNITS)
                arrays[name] = columns_of(label, item, names, unit[0] if unit else "", turned=matlab)

        file.visititems(note)
        kind = "MATLAB file" if matlab else "HDF5 file"
        found, remarks = chosen(path, grouped(arrays), part, kind)
        return table_of(found, "MATLAB" if matlab else "HDF5", held_bytes, remarks)


def _begins_as_matlab(path: Path) -> bool:
    with path.open("rb") as file:
        return file.read(6) == b"MATLAB"


def _attribute(item: Any, known: Sequence[str]) -> list[str]:
    value = next((item.attrs[name] for name in known if name in item.attrs), ())
    listed = [value] if isinstance(value, str | bytes) else list(np.atleast_1d(value))
    return [one.decode(errors="replace") if isinstance(one, bytes) else str(one) for one in listed]


def read_matlab(path: Path, part: str, held_bytes: int) -> RawTable:
    """A matrix, the vectors side by side, or the fields of a structure."""
    from scipy import io as scipy_io

    with understood(path, "MATLAB"):
        content: dict[str, Any] = scipy_io.loadmat(path, struct_as_record=True, mat_dtype=False)
    arrays: dict[str, list[Column]] = {}
    for name, array in content.items():
        if not isinstance(array, np.ndarray):
            continue
        if array.dtype.names and array.size == 1:
            for label in array.dtype.names:
                arrays[f"{name}/{label}"] = columns_of(label, np.asarray(array[label].item()))
        else:
            arrays[name] = columns_of(name, array)
    found, remarks = chosen(path, grouped(arrays), part, "MATLAB file")
    return table_of(found, "MATLAB", held_bytes, remarks)


def read_tdms(path: Path, part: str, held_bytes: int) -> RawTable:
    """The channels of one group."""
    with installed("tdms", path):
        import nptdms
    with understood(path, "TDMS"), path.open("rb") as opened, nptdms.TdmsFile.open(opened) as file:
        groups = [Found(group.name, tuple(_tdms_columns(group))) for group in file.groups()]
        found, remarks = chosen(path, [one for one in groups if one.columns], part, "TDMS file")
        return table_of(found, "TDMS", held_bytes, remarks)


def _tdms_columns(group: Any) -> Iterator[Column]:
    for channel in group.channels():
        if len(channel) and channel.dtype.kind in "biufM":
            unit = str(channel.properties.get("unit_string", ""))
            yield Column(channel.name, len(channel), _tdms_reader(channel), unit)


def _tdms_reader(channel: Any) -> Any:
    return lambda start, stop: np.asarray(channel[start:stop])


def read_mdf(path: Path, part: str, held_bytes: int) -> RawTable:
    """The channels of one group, which share a time base."""
    with installed("mdf", path):
        import asammdf
    if not _has_mdf_header(path):
        raise TableError(f"Couldn't read {str(path)!r} as MDF: the file is damaged or cut off.")
    with understood(path, "MDF"), closing(asammdf.MDF(path)) as file:
        groups = [Found(f"group {at}", tuple(_mdf_columns(file, at))) for at in range(len(file.groups))]
        found, remarks = chosen(path, [one for one in groups if one.columns], part, "MDF file")
        return table_of(found, "MDF", held_bytes, remarks)


def _has_mdf_header(path: Path) -> bool:
    """Whether the second block is the header; the library fails noisily, and late, where it is not."""
    with path.open("rb") as file:
        return file.read(68)[64:].removeprefix(b"##").startswith(b"HD")


def _mdf_columns(file: Any, group: int) -> Iterator[Column]:
    rows = int(file.groups[group].channel_group.cycles_nr)
    for at, channel in enumerate(file.groups[group].channels):
        glance = file.get(group=group, index=at, record_count=1)
        if rows and glance.samples.ndim == 1 and glance.samples.dtype.kind in "biuf":
            yield Column(channel.name, rows, _mdf_reader(file, group, at), glance.unit or "")


def _mdf_reader(file: Any, group: int, at: int) -> Any:
    def read(start: int, stop: int) -> Any:
        return file.get(group=group, index=at, record_offset=start, record_count=stop - start).samples

    return read
