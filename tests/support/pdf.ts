/** The words on each page of a PDF, read by a library that did not write it. */
import { getDocument, VerbosityLevel } from 'pdfjs-dist/legacy/build/pdf.mjs'

export async function pagesOfPdf(bytes: Uint8Array): Promise<string[]> {
  const document = await getDocument({
    data: bytes,
    verbosity: VerbosityLevel.ERRORS,
    useSystemFonts: false,
    disableFontFace: true,
  }).promise
  const pages: string[] = []
  for (let number = 1; number <= document.numPages; number += 1) {
    const { items } = await (await document.getPage(number)).getTextContent()
    pages.push(items.map((item) => ('str' in item ? item.str : '')).join(' '))
  }
  await document.destroy()
  return pages
}
