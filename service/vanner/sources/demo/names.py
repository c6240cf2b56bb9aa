"""Invented names: the town of Ossenhithe on the river Quarle, its people, ships and firms.

None of them is meant to exist. Surnames and ship names are put together from parts, so that
the tail of rare names is as long as in real copy.
"""

from __future__ import annotations

from vanner.sources.demo.grammar import entries, listed

_SURNAME_FIRST = listed("""
Ask, Bram, Cull, Dray, Esk, Fenn, Garl, Hax, Ild, Kess, Lorr, Marl, Nesk, Orl, Pell, Quell,
Rusk, Skarr, Thrum, Ulv, Venn, Wisk, Yarl, Zell
""")
_SURNAME_LAST = listed("""
aby, erly, ander, ock, umble, owick, infold, orrow, ister, ampion, olt, enby, udge
""")
_SHIP_FIRST = listed("""
Patient, Tardy, Solemn, Amiable, Reluctant, Thrifty, Punctual, Modest, Obstinate, Wistful,
Sober, Candid, Drowsy, Prudent, Cordial, Dogged, Placid, Earnest, Bashful, Frugal, Genial,
Tactful, Hearty, Pensive, Nimble, Unassuming
""")
_SHIP_LAST = listed("""
Margrave, Haddock, Dowager, Notary, Curlew, Abbess, Beadle, Chandler, Lamplighter, Milliner,
Tinsmith, Plover, Verger, Cooper, Seamstress, Turnstone, Registrar, Postmistress, Dunlin,
Glazier, Sexton, Apothecary, Whimbrel, Ratcatcher, Governess, Cartographer, Bittern, Farrier
""")


def _crossed(firsts: tuple[str, ...], lasts: tuple[str, ...], joint: str) -> tuple[str, ...]:
    """Every pair once, going down a diagonal so that neighbours in rank share no part."""
    return tuple(
        first + joint + lasts[(place + turn) % len(lasts)]
        for turn in range(len(lasts))
        for place, first in enumerate(firsts)
    )


NAMES: dict[str, tuple[str, ...]] = {
    "surname": _crossed(_SURNAME_FIRST, _SURNAME_LAST, ""),
    "ship": _crossed(_SHIP_FIRST, _SHIP_LAST, " ")[:420],
    "first": listed("""
        Agnes, Bertil, Cosima, Dorrit, Edwin, Freda, Gideon, Hester, Isidor, Jonquil, Kasper,
        Leonie, Mabel, Norbert, Ottilie, Percival, Quentin, Rosalind, Silas, Theodora, Ursula,
        Vernon, Wilma, Yorick, Zelda, Ambrose, Beatrix, Clement, Delphine, Enid, Florian, Greta,
        Horace, Imogen, Jasper, Kit, Lavinia, Monty, Nell, Orson, Prudence, Rufus, Sibyl,
        Tobias, Una, Viola, Wystan, Alma, Basil, Cora
    """),
    "person": ("{_first} {_surname}",),
    "councillor": listed("""
        Councillor Hester Pellumble, Councillor Isidor Garlowick, Councillor Mabel Thrumock,
        Councillor Gideon Yarlorrow, Councillor Ottilie Neskander, Councillor Vernon Haxinfold,
        Councillor Cosima Marlampion, Councillor Rufus Drayister, Councillor Enid Quellerly,
        Councillor Silas Eskolt, Councillor Una Lorraby, Councillor Florian Bramudge
    """),
    "magistrate": listed("""
        magistrate Delphine Skarrock, magistrate Clement Vennister, magistrate Alma Ildolt,
        magistrate Horace Kessumble
    """),
    "street": listed("""
        Ropewalk, Tallow Hill, Candle Row, Brinepan Lane, Needle Street, Old Capstan Street,
        Herringbone Yard, Pinchbeck Steps, Lantern Parade, Sailcloth Road, Upper Mangle Street,
        Vinegar Lane, Bosun's Rise, Oyster Walk, Thimble Court, Windlass Avenue, Turnpenny Road,
        Pewter Close, Kelpburners Way, Beacon Terrace, Chandlery Row, Hopscotch Alley,
        Marram Drive, Ferrymans Slip, Gullet Lane, Sandglass Street, Twine Street, Cooperage Road,
        Larder Lane, Mizzen Crescent, Quarrel Lane, Samphire Gardens, Tinderbox Row, Weighhouse
        Street, Poke Lane, Drift Road, Hollowtree Road, Inkpot Passage, Cinder Bank, Sorrel Way
    """),
    "district": listed("""
        Netherstrand, Saltpan, Bellwater, Caskside, Upper Keldy, Tanfield, Quarlemouth,
        Gallowgreen, Marshgate, Northbrow, Fiddler's End, Eelbridge
    """),
    "village": listed("""
        Fennock, Great Ebbing, Little Ebbing, Sallowby, Harrowness, Dunlow Bay, Cockle Staithe,
        Mossgrave, Wexby Sands, Thornwade, Pollardsea, Under Brackle, Cold Yarrow, Skellerby
    """),
    "town": listed("""
        Kettlemouth, Port Averill, Stranraven, Lowenstrand, Marrasund, Ilverpool Head, Gantby,
        Saint Orrin's, Holmeward, Ebbstead, Vardholm, Tressick
    """),
    "club": listed("""
        Ossenhithe Wanderers, Saltpan Rovers, Quarlemouth Harbour, Bellwater Albion, Fennock
        United, Great Ebbing Town, Netherstrand Rangers, Sallowby Athletic, Kettlemouth City,
        Harrowness Thistle, Gantby Borough, Marshgate Old Scholars, Tressick Corinthians,
        Dunlow Bay, Eelbridge Casuals, Mossgrave Villa
    """),
    "firm": listed("""
        Pellock and Daughters, Quarle Cold Storage, Brinepan Chandlers, Haxander Freight,
        Lorrock Timber, Estuary Grain Handling, Thrumble Packaging, Yarlister Boatbuilders,
        Caskside Cooperage, Saltpan Bakeries, Marlowick Shipping, Venn and Orlander, Ropewalk
        Textiles, Tallow Hill Dairy, Keldy Quarries, Whimbrel Lines, Skellerby Scaffold Hire,
        Skarraby Marine Paints, Netherstrand Nurseries, Gullet Brewery, Marrasund Mutual,
        Eskenby Instruments, Eelbridge Coaches, Ruskolt Salvage Stores, Inkpot Printers,
        Zellander Optics, Glasswort Foods, Thrumock Rigging, Drayerly Tyres, Quellander Seeds
    """),
    "school": listed("""
        Ropewalk Primary, Bellwater School, Saltpan Infants, Quarlemouth Academy, Netherstrand
        High School, Upper Keldy Primary, Tanfield School, the Nautical College, Marshgate Juniors
    """),
    "venue": listed("""
        the Old Weighhouse, the Corn Loft, the Assembly Rooms, Saint Brannock's Hall, the Sail
        Loft Theatre, the Fishermen's Institute, the Museum of Knots, Bellwater Chapel, the
        Reading Room, the Bandstand, the Lantern Picture House, the Town Library
    """),
    "ferry": listed("the Dilys Marrow, the Humble Pilgrim, the Lady Quarle, the Second Thought"),
    "wharf": listed("""
        Cask Quay, Grain Wharf, Timber Wharf, North Mole, Tallow Quay, the Fish Dock, Coaster
        Basin, Lead Wharf, the Ferry Stage, Ballast Quay
    """),
    "writer": listed("""
        Wilma Askinfold, Kasper Fennudge, Leonie Wiskander, Norbert Cullenby, Greta Ulvock,
        Basil Orlister, Rosalind Zellaby
    """),
    "wireman": listed("rk, dmo, jpl, tva, hoe"),
    "fan": entries("""
season ticket holder {_person}
groundsman {_person}
club secretary {_person}
a man in a borrowed scarf
    """),
}
