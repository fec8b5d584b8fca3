/** What a column is called: the standards' terms (SAE J1930, from memory), their abbreviations and common spellings. */
import type { ChannelName } from '../../../shared/contract/logs.ts'

/** Lower case letters and digits, accents off: "Température d’eau" and "temperature deau" are one name. */
const fold = (title: string): string =>
  title
    .normalize('NFD')
    .replace(/\p{M}/gu, '')
    .toLowerCase()
    .replace(/[^\p{L}\p{N}]/gu, '')

/** Names as `fold` leaves them, by channel. */
const names: Readonly<Record<ChannelName, string>> = {
  time: `
    time timestamp zeit temps tiempo elapsedtime seconds sec t times uhrzeit zeitstempel horodatage tiempos
    timesec logtime elapsed laufzeit
  `,
  rpm: `
    rpm enginespeed enginerpm speedengine drehzahl motordrehzahl regime regimemoteur revoluciones umin rev
    vitessemoteur regimenmotor regimen tourminute trmin revolutions enginespeedrpm rpms velocidadmotor
  `,
  map: `
    map manifoldpressure manifoldabsolutepressure intakemanifoldpressure intakepressure saugrohrdruck
    pressionadmission presionadmision boost boostpressure intakemanifoldabsolutepressure
    intakemanifoldabspressure manifoldabspressure manifoldabsolute manifoldpress ladedruck pressioncollecteur
    pressiondadmission presioncolector presiondeadmision absolutepressure
  `,
  lambda: `
    lambda afr airfuelratio wideband o2 lambda1 afr1 measuredlambda measuredafr lambdameasured widebandlambda
    widebandafr equivalenceratio phi lambdasensor lambdavalue lambdaist o2sensor oxygensensor heatedoxygensensor
    lambdasonde sondelambda widebando2 airfuel airfuelratiomeasured rapportairessence
    relacionairecombustible
  `,
  targetLambda: `
    targetlambda lambdatarget targetafr afrtarget commandedlambda desiredlambda solllambda lambdasoll lambdacible
    consignelambda lambdaobjetivo airfuelratiotarget targetairfuelratio airfueltarget commandedafr desiredafr
    lambdasetpoint lambdacommand requestedlambda
  `,
  ect: `
    ect clt coolant coolanttemperature enginecoolanttemperature coolanttemp watertemp kuehlmitteltemperatur
    temperatureeau eautemperature watertemperature enginetemp enginetemperature
    kuhlmitteltemperatur kuhlwassertemperatur kuehlwassertemperatur kuhlmitteltemp temperaturemoteur
    temperatureliquide temperaturadelrefrigerante temperaturarefrigerante temperaturamotor temperaturaagua
    motortemperatur wassertemperatur
  `,
  iat: `
    iat intakeairtemperature intakeairtemp airtemp airtemperature intaketemp chargetemperature ansauglufttemperatur
    temperatureair mat inletairtemperature inletairtemp inlettemp manifoldairtemp manifoldairtemperature
    aircharge airchargetemperature ansaugtemperatur lufttemperatur temperaturedair temperatureairadmission
    temperaturaaire temperaturaadmision temperaturadeaire
  `,
  tp: `
    tp tps throttle throttleposition throttleangle drosselklappe papillon mariposa throttlepos throttlepercent
    throttlepositionsensor absolutethrottleposition throttlevalve drosselklappenstellung drosselklappenwinkel
    drosselklappenposition positionpapillon ouverturepapillon posicionmariposa
  `,
  trim: `
    trim closedlooptrim shorttermfueltrim stft fueltrim lambdacorrection closedloopcorrection
    shortfueltrim shorttermtrim lambdatrim o2correction o2trim lambdaregler correctionlambda
    correccionlambda
  `,
  warmup: `
    warmup warmupenrichment warmupcorrection warmlauf warmupfuel coldenrichment
    warmlaufanreicherung enrichissementchauffe calentamiento
  `,
  afterStart: `
    afterstart afterstartenrichment afterstartcorrection poststart nachstart
    nachstartanreicherung apresdemarrage postarranque
  `,
  accel: `
    acceleration accelerationenrichment accelenrichment transientfuel accelcorrection
    acceleratorenrichment beschleunigungsanreicherung enrichissementacceleration transientcorrection
  `,
  pulseWidth: `
    pulsewidth injectorpulsewidth pw injectiontime einspritzzeit tempsinjection injectorpw
    injectorpulse injectorontime fuelpulsewidth injectionduration einspritzdauer tempsdinjection dureeinjection
    tiempoinyeccion tiempodeinyeccion pulsewidth1 injectortime
  `,
  battery: `
    battery batteryvoltage vbat batt voltage systemvoltage batterie batteryvolts battvoltage battv batv vbatt
    bordspannung batteriespannung tensionbatterie voltajebateria tensionbateria bateria supplyvoltage
  `,
  baro: `
    baro barometricpressure barometer ambientpressure atmosphericpressure umgebungsdruck barometricabsolutepressure
    baropressure barometric atmospheric luftdruck pressionatmospherique pressionbarometrique presionatmosferica
    presionbarometrica
  `,
}

const byName = new Map<string, ChannelName>(
  Object.entries(names).flatMap(([channel, list]) =>
    list
      .trim()
      .split(/\s+/)
      .map((name) => [name, channel as ChannelName] as const),
  ),
)

/** The channel a title names, or null; of numbered sensors the first counts. */
export function recogniseName(title: string): ChannelName | null {
  const folded = fold(title)
  return byName.get(folded) ?? byName.get(folded.replace(/1$/, '')) ?? null
}

/** Names that leave open what is in the column: only a written unit can say. */
const openNames = new Set([
  'o2',
  'o2sensor',
  'oxygensensor',
  'heatedoxygensensor',
  'sondelambda',
  'lambdasonde',
  'equivalenceratio',
])
export const isOpenName = (title: string): boolean => openNames.has(fold(title).replace(/1$/, ''))

export const namesBoost = (title: string): boolean => /^(boost|ladedruck)/.test(fold(title))
