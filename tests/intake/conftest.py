"""A project folder to write input files into, and the faults that reading them gives."""

import pytest

from drc_power.faults import InputError


class Project:
    """A folder with input files. `faults(read)` runs a reader and gives its messages, without the folder's own path."""

    def __init__(self, folder):
        self.folder = folder

    def write(self, name, text):
        path = self.folder / name
        path.parent.mkdir(parents=True, exist_ok=True)
        path.write_bytes(text if isinstance(text, bytes) else text.encode())
        return str(path)

    def faults(self, read):
        with pytest.raises(InputError) as caught:
            read()
        return [str(fault).replace(f"{self.folder}/", "") for fault in caught.value.faults]


@pytest.fixture
def project(tmp_path):
    return Project(tmp_path)
