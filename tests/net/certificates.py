# SPDX-License-Identifier: GPL-3.0-or-later
"""Keys, certificates and authorities for tests, made by the openssl command.

An identity file is what the programs keep: a private key and its certificate
in one PEM file.
"""
import hashlib
import subprocess

import harness

CONFIGURATION = """
[ca]
default_ca = made
[made]
new_certs_dir = {folder}
database = {folder}/index
serial = {folder}/serial
default_md = sha256
policy = any
unique_subject = no
x509_extensions = {section}
[any]
commonName = supplied
[leaf]
basicConstraints = critical, CA:FALSE
subjectAltName = DNS:{name}
[authority]
basicConstraints = critical, CA:TRUE
keyUsage = critical, keyCertSign
[req]
distinguished_name = subject
[subject]
"""
VALID = ("20200101000000Z", "20991231235959Z")
EXPIRED = ("20200101000000Z", "20210101000000Z")


class Authority:
    """Signs certificates.  Its own is at `certificate`."""

    def __init__(self, folder):
        self.folder = folder
        self.key, self.certificate = folder / "ca.key", folder / "ca.pem"
        folder.mkdir()
        (folder / "index").touch()
        (folder / "serial").write_text("1000\n")
        new_key(self.key)
        self.issue(self.key, "authority", self.certificate, VALID,
                   "authority")

    def issue(self, key, name, out, dates=VALID, section="leaf"):
        """A certificate for `key` that carries `name`."""
        configuration = self.folder / "configuration"
        configuration.write_text(CONFIGURATION.format(
            folder=self.folder, name=name, section=section))
        request = self.folder / "request"
        openssl("req", "-new", "-key", key, "-subj", f"/CN={name}",
                "-config", configuration, "-out", request)
        signer = ["-selfsign"] if section == "authority" else \
            ["-cert", self.certificate]
        openssl("ca", "-batch", "-notext", "-config", configuration,
                "-keyfile", self.key, *signer, "-in", request, "-out", out,
                "-startdate", dates[0], "-enddate", dates[1])

    def identity(self, path, name, dates=VALID):
        """Write an identity file whose certificate is from here."""
        key, certificate = self.folder / "leaf.key", self.folder / "leaf.pem"
        new_key(key)
        self.issue(key, name, certificate, dates)
        path.parent.mkdir(mode=0o700, exist_ok=True)
        path.write_bytes(key.read_bytes() + certificate.read_bytes())
        path.chmod(0o600)
        return digest(certificate)


def openssl(*argv):
    done = subprocess.run(["openssl"] + [str(word) for word in argv],
                          capture_output=True, stdin=subprocess.DEVNULL,
                          env=harness.environment())
    assert done.returncode == 0, f"openssl {argv}: {done.stderr.decode()}"
    return done.stdout


def new_key(path):
    openssl("genpkey", "-algorithm", "EC", "-pkeyopt",
            "ec_paramgen_curve:P-256", "-out", path)


def digest(certificate):
    """sha256:... of the public key, SubjectPublicKeyInfo in DER."""
    public = openssl("x509", "-in", certificate, "-noout", "-pubkey")
    path = certificate.with_suffix(".public")
    path.write_bytes(public)
    der = openssl("pkey", "-pubin", "-in", path, "-outform", "DER")
    return "sha256:" + hashlib.sha256(der).hexdigest()
