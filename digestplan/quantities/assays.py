"""The activity units, each with the assay that defines it.

Units of two assays are never the same quantity: the enzyme, its isoforms and the substrate set
the factor between them, and only the certificate of the lot knows it.
"""

from collections.abc import Mapping
from dataclasses import dataclass
from types import MappingProxyType


@dataclass(frozen=True, slots=True)
class AssayUnit:
    """
    One activity unit.

    Attributes
    ----------
    name
        How it is written, and what `Quantity.activity` says.
    definition
        What one unit does under the conditions of its assay.
    source
        Where the definition was read, or ``from memory``.
    also
        Another unit of the same quantity, by definition; None without one.
    """

    name: str
    definition: str
    source: str
    also: str | None = None


_UNITS = (
    AssayUnit(
        "U",
        "1 µmol of substrate turned over a minute, under stated conditions",
        "International Union of Biochemistry, Enzyme Nomenclature, 1964 (from memory); SI: katal",
        also="nkat",
    ),
    AssayUnit(
        "CDU",
        "collagen digestion unit: from collagen, in 5 h at 37 °C and about pH 7.4 with calcium,"
        " amino groups equal in ninhydrin colour to 1 µmol of leucine",
        "Mandl, MacLennan and Howes, J. Clin. Invest. 32, 1323, 1953 (from memory); Worthington"
        " Enzyme Manual, collagenase assay",
    ),
    AssayUnit(
        "WU",
        "Wünsch unit: 1 µmol of the 4-phenylazobenzyloxycarbonyl pentapeptide split a minute,"
        " 25 °C, pH 7.1",
        "Wünsch and Heidrich, Hoppe-Seyler's Z. Physiol. Chem. 333, 149, 1963 (from memory)",
    ),
    AssayUnit(
        "FALGPA_U",
        "1 µmol of 2-furylacryloyl-Leu-Gly-Pro-Ala split a minute, 25 °C, pH 7.5, with calcium",
        "Van Wart and Steinbrink, Anal. Biochem. 113, 356, 1981 (from memory)",
    ),
    AssayUnit(
        "BAEE_U",
        "trypsin: absorbance at 253 nm of benzoyl-arginine ethyl ester rising by 0.001 a minute,"
        " 25 °C, pH 7.6, 3.2 mL, 1 cm; the pharmacopoeia's unit (USP_U) is a rise by 0.003",
        "Schwert and Takenaka, Biochim. Biophys. Acta 16, 570, 1955 (from memory); United States"
        " Pharmacopeia 29, Crystallized Trypsin (its 0.003 from memory)",
        also="USP_U",
    ),
    AssayUnit(
        "PEP_U",
        "pepsin: soluble products of haemoglobin that raise the absorbance at 280 nm by 0.001 a"
        " minute, 37 °C, pH 2.0",
        "Anson, J. Gen. Physiol. 22, 79, 1938 (from memory); Worthington Enzyme Manual, pepsin"
        " assay",
    ),
    AssayUnit(
        "CAS_U",
        "casein split to products equal in Folin colour to 1 µmol of tyrosine a minute, 37 °C,"
        " pH 7.5",
        "Folin and Ciocalteu, J. Biol. Chem. 73, 627, 1927; common practice (from memory)",
    ),
    AssayUnit(
        "ATEE_U",
        "chymotrypsin, subtilisin: 1 µmol of acetyl-tyrosine ethyl ester split a minute, 25 or"
        " 30 °C",
        "common practice (from memory)",
    ),
    AssayUnit(
        "TAME_U",
        "trypsin: 1 µmol of tosyl-arginine methyl ester split a minute, 25 °C, pH 8.2, with"
        " calcium",
        "Hummel, Can. J. Biochem. Physiol. 37, 1393, 1959 (from memory); Worthington Enzyme"
        " Manual, trypsin assay",
    ),
    AssayUnit(
        "AU",
        "Anson unit: haemoglobin split to products equal in Folin colour to 1 mmol of tyrosine a"
        " minute (no absorbance, which has no unit)",
        "Anson, J. Gen. Physiol. 22, 79, 1938, as told by Sweeney and Walker, Methods Mol. Biol."
        " 16, 290, 1993",
        also="mAU",
    ),
    AssayUnit(
        "PNA_U",
        "1 µmol of p-nitroaniline set free a minute from the peptide that the label names",
        "common practice (from memory)",
    ),
    AssayUnit(
        "PU",
        "papain unit: casein split to products equal to 1 µg of tyrosine an hour, 40 °C, pH 6.0",
        "Food Chemicals Codex, plant proteolytic activity (from memory)",
    ),
    AssayUnit(
        "HUT",
        "acid fungal protease on haemoglobin: in a minute, pH 4.7 and 40 °C, the absorbance at"
        " 275 nm of 1.10 µg of tyrosine a mL",
        "Food Chemicals Codex, fungal proteolytic activity (from memory)",
    ),
)

ASSAY_UNITS: Mapping[str, AssayUnit] = MappingProxyType({unit.name: unit for unit in _UNITS})
