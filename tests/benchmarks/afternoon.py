"""What an analyst would write in an afternoon, workbooks in and signed PDFs out: report_bench.py's baseline.

    python tests/benchmarks/afternoon.py OUT EXPORT…

The figure is a bare drawing; with a plotting library, as most would use, it would take longer.
Prints the seconds of each report as JSON.
"""

from __future__ import annotations

import datetime as dt
import io
import itertools
import json
import sys
import time
from pathlib import Path

import pandas as pd
from cryptography import x509
from cryptography.hazmat.primitives import hashes, serialization
from cryptography.hazmat.primitives.asymmetric import rsa
from cryptography.hazmat.primitives.serialization import pkcs12
from jinja2 import Template
from pyhanko.pdf_utils.incremental_writer import IncrementalPdfFileWriter
from pyhanko.sign import signers
from scipy import stats
from weasyprint import HTML

PAGE = Template("""<!doctype html><html lang="en"><meta charset="utf-8"><title>{{ name }}</title>
<style>@page { size: A4; margin: 18mm; @bottom-right { content: counter(page) } }
body { font: 10pt serif } table { width: 100%; border-collapse: collapse }
td { border-top: 1px solid #999 }</style>
<h1>{{ name }}</h1>
{% for head, rows in tables %}<h2>{{ head }}</h2><table>
{% for row in rows %}<tr>{% for cell in row %}<td>{{ cell }}</td>{% endfor %}</tr>{% endfor %}</table>
{% endfor %}
{% for batch, values in groups.items() %}<p>{{ batch }}</p><svg width="600" height="20">
{% for v in values %}<rect x="{{ (v - low) * scale }}" width="1" height="12" y="4"/>{% endfor %}</svg>
{% endfor %}
""")


def key_file(folder: Path) -> Path:
    """Make a key with its certificate."""
    key = rsa.generate_private_key(public_exponent=65537, key_size=3072)
    name = x509.Name([x509.NameAttribute(x509.NameOID.COMMON_NAME, "Laboratory")])
    now = dt.datetime.now(dt.UTC)
    certificate = (
        x509.CertificateBuilder()
        .subject_name(name)
        .issuer_name(name)
        .public_key(key.public_key())
        .serial_number(x509.random_serial_number())
        .not_valid_before(now - dt.timedelta(days=1))
        .not_valid_after(now + dt.timedelta(days=30))
        .add_extension(x509.KeyUsage(True, True, *[False] * 7), critical=True)
        .sign(key, hashes.SHA256())
    )
    path = folder / "key.p12"
    secret = serialization.BestAvailableEncryption(b"afternoon")
    path.write_bytes(pkcs12.serialize_key_and_certificates(b"lab", key, certificate, None, secret))
    return path


def report(export: Path, out: Path, key: Path) -> None:
    """Make one signed report."""
    table = pd.read_excel(export, engine="openpyxl")
    column = table.columns[-1]
    groups = {str(k): g[column].astype(float).tolist() for k, g in table.groupby("Batch")}
    names, values = list(groups), list(groups.values())
    described = [
        (k, len(v), f"{pd.Series(v).mean():.3f}", f"{pd.Series(v).std():.3f}") for k, v in groups.items()
    ]
    centred = [x - sum(v) / len(v) for v in values for x in v]
    tests = [
        (name, f"{found.statistic:.4f}", f"{found.pvalue:.4g}")
        for name, found in (
            ("F", stats.f_oneway(*values)),
            ("Levene", stats.levene(*values)),
            ("Shapiro-Wilk", stats.shapiro(centred)),
        )
    ]
    pairs = stats.tukey_hsd(*values)
    ends = pairs.confidence_interval(0.95)
    compared = [
        (
            f"{names[i]} against {names[j]}",
            *(f"{m[i, j]:.3f}" for m in (pairs.statistic, ends.low, ends.high, pairs.pvalue)),
        )
        for i, j in itertools.combinations(range(len(names)), 2)
    ]
    low, high = min(map(min, values)), max(map(max, values))
    html = PAGE.render(
        name=export.stem,
        groups=groups,
        low=low,
        scale=600 / (high - low),
        tables=[
            ("Batches", described),
            ("Tests", tests),
            ("Pairs", compared),
            ("Data", table.astype(str).values.tolist()),
        ],
    )
    pdf = HTML(string=html).write_pdf()
    signer = signers.SimpleSigner.load_pkcs12(str(key), passphrase=b"afternoon")
    meta = signers.PdfSignatureMetadata(field_name="Signature")
    with (out / f"{export.stem}.pdf").open("wb") as stream:
        signers.sign_pdf(IncrementalPdfFileWriter(io.BytesIO(pdf)), meta, signer=signer, output=stream)


def main() -> None:
    """Make all reports and say how long each took."""
    out = Path(sys.argv[1])
    out.mkdir(parents=True, exist_ok=True)
    key = key_file(out)
    seconds = []
    for export in map(Path, sys.argv[2:]):
        start = time.perf_counter()
        report(export, out, key)
        seconds.append(time.perf_counter() - start)
    print(json.dumps(seconds))


if __name__ == "__main__":
    main()
