/** Mail: pure templates, and a queue that sends them through SMTP after the causing transaction is committed. */
export type { MailMessage } from './message';
export { queueMail, sendMailJob, type OutgoingMail } from './queue';
export * from './templates';
