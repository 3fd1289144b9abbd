"""What a column of a BOM means, from its heading in any of the languages seen."""

from __future__ import annotations

import re
from functools import lru_cache
from typing import Literal

from yieldosc.quantities import normal

Meaning = Literal[
    "designator", "quantity", "value", "description", "name", "part_number", "supplier_number", "tolerance", "law",
    "rating", "package", "fitted", "not_fitted", "kind", "note", "load", "esr", "frequency", "scope", "ignored",
]  # fmt: skip

_PHRASES: dict[Meaning, str] = {
    "designator": "designator|designators|reference|references|reference s|ref|refs|refdes|ref des|ref designator|"
    "part|parts|reference designator|reference designators|circuit ref numbers|circuit reference|position|"
    "positions|bauteil|bauteile|referenz|referenzen|bezeichner|repère|repères|désignateur|référence|referencia|"
    "referencias|designador|riferimento|riferimenti|обозначение|поз обозначение|позиционное обозначение|позиция|"
    "位号|标号|元件位号|参照名|参照|リファレンス|部品番号|oznaczenie|beteckning|schematic reference|"
    "component reference",
    "quantity": "quantity|qty|qnty|qtty|quant|count|amount|pcs|pieces|menge|anzahl|anz|stück|stk|stückzahl|"
    "quantité|qté|cantidad|cant|quantità|quantidade|qtde|кол во|количество|кол|数量|个数|個数|员数|員数|用量|ilość|"
    "antal|aantal|per board",
    "value": "value|values|val|wert|werte|valeur|valor|valore|valores|значение|номинал|值|元件值|値|定数|wartość|"
    "värde|waarde|capacitance|resistance|inductance",
    "description": "description|desc|descr|component description|beschreibung|bezeichnung|descripción|descrição|"
    "descrizione|désignation|описание|наименование|描述|规格|说明|品名|商品名称|仕様|規格|opis|function|funktion|"
    "details|specification|spec|specifications|specs|parameters|characteristics|kenndaten|part description",
    "name": "name|comment|comments|model|modell|type|typ|device|libpart|cmp name|item name|part name|component|"
    "component name|nom|nombre|nome|tipo|тип|名称|型号|型式|libref|artikel",
    "part_number": "manufacturer part number|manufacturer part|mfr part number|mfr part|mfg part|mfg part number|"
    "mpn|manf|mfr no|mfg no|mfr|partnumber|part number|part no|part nr|p n|pn|hersteller nr|herstellernummer|"
    "hersteller teilenummer|référence fabricant|артикул|номер производителя|厂家型号|制造商型号|型番|メーカー型番|"
    "mfgpn|mfpn",
    "supplier_number": "supplier part|supplier part number|supplier ref|lcsc|lcsc part|lcsc part number|"
    "distributor|order no|order code|order number|bestellnummer|bestell nr|sku|stock code|商品编号|alt part number|"
    "code commande",
    "tolerance": "tolerance|tol|toleranz|tolérance|tolerancia|tolerância|tolleranza|допуск|精度|公差|误差|許容差",
    "law": "temperature coefficient|tempco|tcr|tc|temperature characteristic|dielectric|dielektrikum|"
    "temperature law|ткс|тке|温度系数|温度特性|diélectrique|dielectrico|材质",
    "rating": "voltage|rated voltage|voltage rating|spannung|напряжение|电压|耐压|耐圧|tension|power|wattage|"
    "power rating|leistung|мощность|功率|定格電力|puissance|current|strom|ток|电流",
    "package": "package|footprint|case|case size|size|gehäuse|bauform|pattern|pcb footprint|корпус|封装|パッケージ|"
    "boîtier|encapsulado|land pattern|package footprint|body",
    "fitted": "fitted|populated|populate|place|mount|mounted|assemble|stuff|bestückt|bestückung|bestücken|install|"
    "installed|устанавливать|装配|実装",
    "not_fitted": "dnp|dnf|dni|do not populate|do not fit|do not place|do not stuff|not fitted|nicht bestücken|"
    "nicht bestückt|no stuff|не устанавливать|未実装",
    "kind": "category|kind|part type|component type|class|teileart|категория|类别|类型|分类|種類",
    "note": "note|notes|remark|remarks|bemerkung|bemerkungen|anmerkung|примечание|примечания|备注|備考|kommentar|"
    "hinweis|observações|observaciones|remarque|remarques",
    "load": "load|load capacitance|cl|lastkapazität|负载电容|負荷容量",
    "esr": "esr",
    "frequency": "frequency|freq|frequenz|частота|频率|周波数|fréquence|frecuencia",
    "scope": "board|section|module|assembly|baugruppe|platine|плата",
    "ignored": "price|unit price|total|total price|cost|manufacturer|manufacturer name|hersteller|supplier|vendor|"
    "link|datasheet|data sheet|url|item|no|id|line|line no|pos|number|rohs|lifecycle|mf|mfr name|quantity total|"
    "total quantity|total qty|customer no|manufacturer 1|supplier 1|alt vendor|序号|价格|制造商|メーカー|цена|"
    "производитель|preis|prix|precio",
}  # fmt: skip
_STARTS: tuple[tuple[str, Meaning], ...] = (
    (r".*\b(total|gesamt|итого)\b", "ignored"),
    (r".*\b(price|preis|cost|link|url|datasheet|lifecycle)\b", "ignored"),
    (r"(reference|ref des|designat)", "designator"),
    (r"(quantity|qty|qnty|anzahl|menge|количество|数量|订购数量)", "quantity"),
    (r"(manufacturer|manuf|mfr|mfg|man)\b.*\b(part|p n|number|no)\b", "part_number"),
    (r"(厂家型号|制造商型号)", "part_number"),
    (r"(supplier|distributor|digikey|mouser|farnell|newark|lcsc|reichelt|oc)\b.*", "supplier_number"),
    (r"(value|wert|valor|valeur|номинал)\b", "value"),
    (r"(tolerance|toleranz|tol)\b", "tolerance"),
    (r"(description|beschreibung|описание)", "description"),
    (r"(footprint|package|gehäuse|корпус)", "package"),
    (r"do not (fit|populate|place|stuff|install)", "not_fitted"),
)


def heading_key(text: str) -> str:
    """A heading without case, signs and repeated blanks."""
    return " ".join(re.sub(r"[^\w ]+|_", " ", normal(text).casefold()).split())


_TABLE: dict[str, Meaning] = {
    heading_key(phrase): meaning for meaning, phrases in _PHRASES.items() for phrase in phrases.split("|")
}


@lru_cache(maxsize=4096)
def column_meaning(heading: str) -> Meaning | None:
    """The meaning of a column with that heading; None for a heading that says nothing."""
    key = heading_key(heading)
    if not key or len(key) > 60:
        return None
    if key in _TABLE:
        return _TABLE[key]
    for pattern, meaning in _STARTS:
        if re.match(pattern, key):
            return meaning
    return None
