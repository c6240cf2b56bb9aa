"""Ordinary things: fish, cargoes, pieces, weather, objects lost and equipment of the harbour."""

from __future__ import annotations

from vanner.sources.demo.grammar import listed

THINGS: dict[str, tuple[str, ...]] = {
    "weekday": listed("Monday, Tuesday, Wednesday, Thursday, Friday, Saturday, Sunday"),
    "fish": listed("""
        cod, haddock, plaice, herring, whiting, mackerel, sole, turbot, brill, ling, gurnard,
        pollack, dab, monkfish, skate, crab, prawns, mussels, cockles, squid, hake, sprats
    """),
    "cargo": listed("""
        timber, barley, road salt, fertiliser, bagged cement, steel coils, wood pulp, animal feed,
        rapeseed, gravel, newsprint, slate, malt, scrap iron, frozen peas, roof tiles, soya meal,
        wind turbine blades, potatoes, china clay, paving stones, sugar beet, machine parts,
        cork, plywood, linseed, tinned tomatoes, porcelain, bicycle frames, oats
    """),
    "sky": listed("""
        overcast, mostly cloudy, bright, hazy, drizzly, fair, changeable, dull, blustery, clear,
        damp, milky, showery
    """),
    "wind": listed("""
        light southwesterly, moderate westerly, fresh northwesterly, gentle southerly, light
        variable, moderate easterly, fresh southwesterly, steady northerly
    """),
    "seastate": listed("smooth, slight, moderate, choppy, lumpy"),
    "play": listed("""
        The Reluctant Apothecary, Six Umbrellas, A Winter in the Pantry, The Clockmaker's Niece,
        Trouble at the Weighbridge, Twelve Chairs and a Table, The Borrowed Ladder, Madam Barometer,
        An Inspector of Puddings, The Last Tram but One, Moonlight on the Allotment, Uncle Fender
    """),
    "instrument": listed("""
        cello, trombone, accordion, viola, euphonium, oboe, concertina, harp, fiddle, clarinet,
        glockenspiel, bassoon, mandolin, cornet
    """),
    "object": listed("""
        umbrella, tartan glove, trumpet case, set of dentures, left boot, knitting bag, ukulele,
        barometer, teapot, birdcage, library book, tin of buttons, wicker hamper, chess clock,
        walking stick, bowler hat, jar of pickled onions, unicycle, telescope, wedge of cheese,
        stuffed pheasant, hearing aid, pram wheel, cuckoo clock, christening spoon, kite,
        fishing reel, opera glasses, feather boa, rolling pin, sewing machine, watering can,
        garden gnome, ice skate, rocking horse, jigsaw puzzle, lampshade, fiddle bow, monocle,
        hot water bottle, thermos flask, satchel, tape measure, pewter mug, doll's house,
        fern in a pot, doormat, harmonica, magnifying glass, wooden leg, bread bin, sundial
    """),
    "hobby": listed("""
        bell ropes, pickling, dry stone walling, lace, chess, pigeon racing, knot tying, morris
        dancing, model engineering, calligraphy, basket weaving, watercolours, whittling, quilting,
        astronomy, folk song, bread baking, orienteering, bookbinding, cribbage, dominoes
    """),
    "vegetable": listed("""
        leek, marrow, onion, parsnip, runner bean, beetroot, pumpkin, cabbage, turnip, radish,
        celeriac, kohlrabi, gooseberry, rhubarb, swede
    """),
    "bird": listed("""
        redshank, avocet, knot, oystercatcher, shelduck, brent goose, tern, wheatear, spoonbill,
        sand martin, godwit, kittiwake, eider, greenshank, ruff, goldeneye
    """),
    "trade": listed("""
        plumber, welder, baker, postwoman, retired tugmaster, teacher, dentist, crane driver,
        bookseller, netmaker, bus driver, nurse, locksmith, chemist, roofer, grain merchant,
        hairdresser, joiner, surveyor, optician, cook, gardener
    """),
    "offence": listed("""
        speeding on the ring road, driving without insurance, taking a dinghy without consent,
        a breach of the peace, shoplifting, unpaid parking fines, riding on the pavement,
        selling undersized crab, keeping a noisy cockerel, fly-tipping, criminal damage to a
        hedge, travelling without a ticket, obstruction of a footpath, being drunk in charge of
        a tricycle, common assault, handling goods of doubtful origin, fraud by false label
    """),
    "roadwork": listed("""
        resurfacing, gas main work, kerb repairs, drain cleaning, tree pruning, cable laying, a
        water main renewal, pothole patching, lamp post painting, a sewer inspection
    """),
    "crane": listed("""
        crane K1, crane K2, crane K3, crane K4, crane K5, crane K6, mobile crane M1, mobile
        crane M2, gantry G1, gantry G2, hopper H1, hopper H2
    """),
    "pump": listed("""
        pump P11, pump P12, pump P13, pump P21, pump P22, pump P31, pump P32, pump P41, bilge
        well pump B2, bilge well pump B3, storm pump S1, storm pump S2
    """),
    "gauge": listed("""
        the Outer Mole gauge, the Quarlemouth gauge, the Bar gauge, the Eelbridge gauge, the
        Coaster Basin gauge, the Ferry Stage gauge
    """),
    "berth": listed("""
        berth 1, berth 2, berth 3, berth 4, berth 5, berth 6, berth 7, berth 8, berth 9, berth
        10, berth 11, berth 12, berth 14, berth 15, berth 16
    """),
    "buoy": listed("""
        Knott buoy, Saddle buoy, Outer Sow buoy, Inner Sow buoy, Middle Patch buoy, Tail buoy,
        Brackle buoy, Fairway buoy, Ness beacon, Spit beacon, Perch 4, Perch 7
    """),
    "tug": listed("tug Bruiser, tug Mild Mannered, tug Ox, tug Persuader, tug Aunt Edna"),
    "pilot": listed("""
        pilot Garlander, pilot Eskumble, pilot Haxolt, pilot Wiskerly, pilot Neskock, pilot
        Fennampion, pilot Ruskenby, pilot Yarlaby
    """),
    "officer": listed("Ulvister, Cullock, Brammudge, Zellowick, Oraby, Kessinfold, Skarrolt"),
    "crew": listed("red watch, blue watch, green watch, white watch"),
    "hoist": listed("""
        bearing, limit switch, slew ring, hoist rope, brake lining, cable reel, spreader pin,
        cabin heater, load cell, anemometer, gearbox breather, festoon cable, wheel flange
    """),
    "part": listed("""
        gasket, impeller, float switch, fuse, contactor, relay, hose clamp, drive belt, gland
        packing, bearing, seal, lamp holder, cable gland, hinge, door closer, proximity sensor,
        grease nipple, battery, fan, filter mat, terminal block, shackle, split pin, bushing
    """),
    "machine": listed("""
        the label printer, the second monitor, the handheld scanner, the document server, the
        weighbridge terminal, the badge reader, the mail gateway, the wall display, the plotter,
        the voice recorder, the wireless bridge, the backup drive, the time server, the map layer
    """),
    "gate": listed("Gate 1, Gate 2, Gate 3, the Ferry Gate, the Timber Gate, the Fish Dock gate"),
    "vehicle": listed("""
        a flatbed, a refrigerated lorry, a tipper, a delivery van, a low loader, a tanker, an
        empty skeletal trailer, a coach, a forklift, a bread van
    """),
    "substation": listed("""
        substation Cask, substation Mole, substation Grain, substation North, substation Ferry
    """),
    "creature": listed("""
        a seal, two swans, a stray spaniel, a heron, an otter, one very settled gull, a fox, a
        family of eiders, a runaway hen, somebody's tabby cat
    """),
    "ticket": ("{num 1000 9899}",),
    "moment": listed("""
        slack water, high water, low water, the meal break, the shift change, the next round, the
        coffee break, half tide, the end of the shift, the top of the hour, first light, sunset
    """),
}
