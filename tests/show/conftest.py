import pytest
import synthetic_flows as synthetic


@pytest.fixture(scope="session")
def nozzle():
    return synthetic.nozzle()


@pytest.fixture(scope="session")
def slot():
    return synthetic.slot()


@pytest.fixture
def result():
    return synthetic.result()
