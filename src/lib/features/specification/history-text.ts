const texts: Record<string, string> = {
  'request.create': 'Draft begun',
  'request.post': 'Posted, specification frozen',
  'request.close': 'Bids closed',
  'request.award': 'Awarded',
  'request.finish': 'Order done',
  'request.end': 'Order ended',
  'request.re-open': 'Opened for award again',
  'request.withdraw': 'Withdrawn',
  'request.lapse': 'Lapsed',
  'request.attach-file': 'File added',
  'question.ask': 'Question asked',
  'question.answer': 'Question answered',
};

/** An audit action as a line of the history. */
export function historyText(action: string): string {
  return texts[action] ?? action.replace('.', ': ').replaceAll('-', ' ');
}
